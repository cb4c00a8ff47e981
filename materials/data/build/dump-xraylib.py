"""Writes the tables the atomic-data builders need from python3-xraylib as JSON on stdout.

Run with the system interpreter: /usr/bin/python3 dump-xraylib.py > xraylib.json
"""
import json
import math
import sys

import xraylib

SHELLS = (
    "K L1 L2 L3 M1 M2 M3 M4 M5 N1 N2 N3 N4 N5 N6 N7 O1 O2 O3 O4 O5 O6 O7 P1 P2 P3 P4 P5 Q1 Q2 Q3"
).split()
# Nodes of the tables of Hubbell et al. (1975) in 1/angstrom; beyond 100 the packaged table has powers of ten.
FORM_FACTOR_NODES = [0.5, 0.6, 0.7, 0.8, 0.9, 1, 1.25, 1.5, 2, 2.5, 3, 3.5, 4, 5, 6, 7, 8, 10, 15, 20, 50, 80, 100, 1000, 1e6]
# Nodes of Biggs, Mendelsohn and Mann (1975) in atomic units of momentum.
MOMENTUM_NODES = [
    0, 0.05, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 1, 1.2, 1.4, 1.6, 1.8, 2, 2.4, 3, 4, 5, 6, 7, 8, 10,
    15, 20, 30, 40, 60, 100,
]
POINTS_PER_DECADE = 50
X_LOW, X_HIGH = 1e-3, 2e3


def momentum_grid():
    count = math.ceil(math.log10(X_HIGH / X_LOW) * POINTS_PER_DECADE)
    return [X_LOW * (X_HIGH / X_LOW) ** (i / count) for i in range(count + 1)]


def optional(function, *arguments):
    """The value, or None where the package has none (it raises ValueError)."""
    try:
        return function(*arguments)
    except ValueError:
        return None


def profiles(z):
    rows = []
    for index, name in enumerate(SHELLS):
        profile = [optional(xraylib.ComptonProfile_Partial, z, index, p) for p in MOMENTUM_NODES]
        electrons = optional(xraylib.ElectronConfig, z, index)
        if profile[0] is not None or electrons:
            rows.append({"name": name, "electrons": electrons, "profile": profile if profile[0] is not None else None})
    return rows


def main():
    x = momentum_grid()
    elements = []
    for z in range(1, 101):
        element = {"z": z, "shells": profiles(z)}
        if z <= 98:
            element["formFactor"] = [xraylib.FF_Rayl(z, q) for q in x if q <= 1.6]
            element["formFactorNodes"] = [xraylib.FF_Rayl(z, q) for q in FORM_FACTOR_NODES]
            element["incoherent"] = [xraylib.SF_Compt(z, q) for q in x]
        elements.append(element)
    json.dump(
        {
            "x": x,
            "formFactorNodesX": FORM_FACTOR_NODES,
            "momentumNodes": MOMENTUM_NODES,
            "elements": elements,
        },
        sys.stdout,
    )


main()
