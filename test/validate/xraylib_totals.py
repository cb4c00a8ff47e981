"""Total mass attenuation coefficients of mixtures by xraylib, as a second opinion.

Reads [[energy_keV, [[z, mass fraction], ...]], ...] as JSON from stdin and writes the totals (cm2/g) as JSON.
"""

import json
import sys

import xraylib


def total(energy_kev, constituents):
    return sum(fraction * xraylib.CS_Total(z, energy_kev) for z, fraction in constituents)


json.dump([total(energy, parts) for energy, parts in json.load(sys.stdin)], sys.stdout)
