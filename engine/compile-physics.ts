/** Sampling tables of the physics processes, per slot. */
import {
  coefficientArrays,
  comptonProfiles,
  elementCoefficients,
  elementOf,
  fillCoefficients,
  formFactorAt,
  incoherentFunctionAt,
  relaxation,
  SUBSHELL_COUNT,
  subshellShares,
  type Constituent,
} from '../materials/index.js';
import { atNodes, compositionKey, fillLines, type Slot } from './compile-slots.js';
import type { EnergyGrid } from './energy-grid.js';
import { RADIATION_CUTOFFS_KEV } from './local-cutoff.js';
import {
  makeBremsstrahlungTables,
  sampleSlowing,
  type BremsstrahlungTables,
} from './physics/bremsstrahlung-tables.js';
import { COHERENT_LENGTH, fillCoherentTable } from './physics/coherent.js';
import { fillAlias, fillProfile, PROFILE_LENGTH, type DopplerTables } from './physics/doppler.js';
import {
  BINDING_GRID,
  fillIncoherentTable,
  incoherentRows,
  ROW_LENGTH,
  type Scatterer,
} from './physics/incoherent.js';
import { logSampled, logSamples } from './physics/log-sampled.js';
import { makeRelaxationTables, type RelaxationTables } from './physics/relaxation.js';
import { sharedDoubles, sharedInts } from './problem.js';
import type { Physics } from './setup.js';

/** Doppler broadening is left out above it: the spread is then small against the energy (design choice). */
const DOPPLER_TOP_KEV = 1000;

/** Just below an edge. */
const BELOW = 1 - 1e-12;

const bindings = new Map<number, Float64Array>();
const formFactors = new Map<number, (x: number) => number>();
/** Momentum transfers (1/Å) at which form factors are sampled. */
const FORM_FACTOR_GRID = { low: 1e-3, high: 2000, nodes: 900 };

function cached<T>(map: Map<number, T>, z: number, make: () => T): T {
  let known = map.get(z);
  if (known === undefined) map.set(z, (known = make()));
  return known;
}

/** S(x)/Z of an element on the grid of the angle tables. */
function bindingOf(z: number): Float64Array {
  return cached(bindings, z, () => logSamples((x) => incoherentFunctionAt(z, x) / z, BINDING_GRID));
}

function formFactor(z: number): (x: number) => number {
  return cached(formFactors, z, () => logSampled((x) => formFactorAt(z, x), FORM_FACTOR_GRID));
}

export interface ScatteringTables {
  readonly incoherent: Float64Array;
  readonly incoherentBase: Int32Array;
  readonly coherent: Float64Array;
  readonly coherentBase: Int32Array;
}

/** Angle tables; slots of one composition share theirs, and free electrons need one table for all. */
export function makeScatteringTables(
  slots: readonly Slot[],
  topKeV: number,
  physics: Physics,
): ScatteringTables {
  const rows = incoherentRows(topKeV);
  const compositions = [
    ...new Map(slots.map((slot) => [compositionKey(slot.constituents), slot])).values(),
  ].filter((slot) => slot.constituents.length > 0);
  const incoherentCount = physics.boundIncoherent ? compositions.length : 1;
  const incoherent = sharedDoubles(incoherentCount * rows * ROW_LENGTH);
  const coherent = sharedDoubles(physics.coherent ? compositions.length * COHERENT_LENGTH : 1);
  if (!physics.boundIncoherent) {
    fillIncoherentTable([{ shareAt: () => 1, binding: null }], rows, incoherent);
  }
  compositions.forEach((slot, c) => {
    if (physics.boundIncoherent) {
      const size = rows * ROW_LENGTH;
      fillIncoherentTable(scatterers(slot.constituents), rows, incoherent.subarray(c * size, (c + 1) * size));
    }
    if (physics.coherent) {
      const mixture = slot.constituents.map(({ z, massFraction }) => ({
        atoms: massFraction / elementOf(z).atomicWeight,
        formFactorAt: formFactor(z),
      }));
      fillCoherentTable(mixture, topKeV, coherent, c * COHERENT_LENGTH);
    }
  });
  const place = (length: number) => {
    const bases = sharedInts(slots.length);
    slots.forEach((slot, s) => {
      const c = compositions.findIndex(
        (other) => compositionKey(other.constituents) === compositionKey(slot.constituents),
      );
      bases[s] = Math.max(0, c) * length;
    });
    return bases;
  };
  return {
    incoherent,
    incoherentBase: physics.boundIncoherent ? place(rows * ROW_LENGTH) : sharedInts(slots.length),
    coherent,
    coherentBase: place(physics.coherent ? COHERENT_LENGTH : 0),
  };
}

function scatterers(constituents: readonly Constituent[]): Scatterer[] {
  return constituents.map(({ z, massFraction }) => ({
    shareAt: (energyKeV) => massFraction * elementCoefficients(z, Math.min(energyKeV, 20_000)).incoherent,
    binding: bindingOf(z),
  }));
}

export interface Doppler {
  readonly dopplerTopKeV: number;
  readonly doppler: DopplerTables;
  readonly dopplerBase: Int32Array;
  readonly dopplerCount: Int32Array;
}

/** Shells of every slot with their electrons; elements share their profiles. */
export function makeDoppler(slots: readonly Slot[], physics: Physics): Doppler {
  const dopplerBase = sharedInts(slots.length);
  const dopplerCount = sharedInts(slots.length);
  const elements = physics.doppler ? elementsOf(slots) : [];
  const profileOf = new Map<string, number>();
  const profiles = elements.flatMap((z) => {
    const { pz, shells } = comptonProfiles(z);
    return shells.map((shell, i) => ({ key: `${z}/${i}`, pz, j: shell.j }));
  });
  const momenta = sharedDoubles(profiles.length * PROFILE_LENGTH);
  profiles.forEach(({ key, pz, j }, i) => {
    profileOf.set(key, i * PROFILE_LENGTH);
    fillProfile(pz, j, momenta, i * PROFILE_LENGTH);
  });
  const shellsOf = (slot: Slot) =>
    slot.constituents.flatMap(({ z, massFraction }) =>
      comptonProfiles(z).shells.map((shell, i) => ({
        share: (massFraction / elementOf(z).atomicWeight) * shell.electrons,
        bindingKeV: shell.bindingKeV,
        profile: profileOf.get(`${z}/${i}`)!,
      })),
    );
  const all = physics.doppler ? slots.map(shellsOf) : slots.map(() => []);
  const total = all.reduce((sum, shells) => sum + shells.length, 0);
  const doppler = {
    keep: sharedDoubles(total),
    alias: sharedInts(total),
    bindingKeV: sharedDoubles(total),
    profile: sharedInts(total),
    momenta,
  };
  let base = 0;
  all.forEach((shells, s) => {
    dopplerBase[s] = base;
    dopplerCount[s] = shells.length;
    if (shells.length > 0) {
      fillAlias(
        shells.map(({ share }) => share),
        doppler.keep,
        doppler.alias,
        base,
      );
    }
    for (const { bindingKeV, profile } of shells) {
      doppler.bindingKeV[base] = bindingKeV;
      doppler.profile[base++] = profile;
    }
  });
  return { dopplerTopKeV: DOPPLER_TOP_KEV, doppler, dopplerBase, dopplerCount };
}

function elementsOf(slots: readonly Slot[]): number[] {
  const all = slots.flatMap(({ constituents }) => constituents.map(({ z }) => z));
  return [...new Set(all)].sort((a, b) => a - b);
}

export interface Channels {
  readonly channelBase: Int32Array;
  readonly channelCount: Int32Array;
  readonly channelShell: Int32Array;
  readonly reachableKeV: Float64Array;
  readonly channelTable: Float64Array;
  readonly channelTableBase: Int32Array;
  readonly relaxation: RelaxationTables;
}

/** Shells that can send out a photon above the cutoff, with their share of the photoelectric coefficient. */
export function makeChannels(slots: readonly Slot[], grid: EnergyGrid, physics: Physics): Channels {
  const { nodesKeV } = grid;
  const cellCount = nodesKeV.length - 1;
  const elements = physics.fluorescence ? elementsOf(slots) : [];
  const shells = new Map(elements.map((z, e) => [z, { first: 4 * e, data: relaxation(z) }]));
  const channelsOf = (slot: Slot) =>
    slot.constituents.flatMap((constituent) => {
      const { first, data } = shells.get(constituent.z)!;
      return data.shells
        .map((shell, i) => ({ constituent, shell: first + i, index: i, shellData: shell }))
        .filter(({ shellData }) => shellData.transitions.some((t) => t.photonKeV >= physics.cutoffKeV))
        .filter(({ shellData }) => shellData.bindingKeV <= nodesKeV[cellCount]);
    });
  const all = slots.map((slot) => (physics.fluorescence ? channelsOf(slot) : []));
  const total = all.reduce((sum, channels) => sum + channels.length, 0);
  const channelBase = sharedInts(slots.length);
  const channelCount = sharedInts(slots.length);
  const channelShell = sharedInts(total);
  const reachableKeV = sharedDoubles(slots.length * cellCount);
  const channelTable = sharedDoubles(total * cellCount * 2);
  const channelTableBase = sharedInts(slots.length);
  let base = 0;
  let tableBase = 0;
  slots.forEach((slot, s) => {
    const channels = all[s];
    channelBase[s] = base;
    channelCount[s] = channels.length;
    channelTableBase[s] = tableBase;
    for (const { shellData } of channels) {
      for (let cell = 0; cell < cellCount; cell++) {
        if (nodesKeV[cell + 1] <= shellData.bindingKeV) continue;
        const at = s * cellCount + cell;
        reachableKeV[at] = Math.max(reachableKeV[at], shellData.bindingKeV);
      }
    }
    const cumulative = new Float64Array(nodesKeV.length);
    const shares = shellShares(slot, nodesKeV);
    channels.forEach(({ constituent, index, shell }, c) => {
      const own = shares(constituent, index);
      for (let i = 0; i < cumulative.length; i++) cumulative[i] += own[i];
      channelShell[base++] = shell;
      fillLines(nodesKeV, cumulative, channelTable, tableBase + 2 * c, 2 * channels.length);
    });
    tableBase += channels.length * cellCount * 2;
  });
  return {
    channelBase,
    channelCount,
    channelShell,
    reachableKeV,
    channelTable,
    channelTableBase,
    relaxation: makeRelaxationTables(elements.map((z) => shells.get(z)!.data)),
  };
}

/** Share of one shell of one element in the photoelectric coefficient of the slot, at every node. */
function shellShares(slot: Slot, nodesKeV: Float64Array) {
  const energiesKeV = nodesKeV.map((energy) => Math.min(energy, 20_000));
  const photoelectric = (constituents: readonly Constituent[]) =>
    atNodes(nodesKeV, (side) => {
      const out = coefficientArrays(nodesKeV.length);
      fillCoefficients({ constituents }, energiesKeV, out, side);
      return out.photoelectric;
    });
  const total = photoelectric(slot.constituents);
  const out = new Float64Array(SUBSHELL_COUNT);
  return (constituent: Constituent, shell: number): Float64Array => {
    const own = photoelectric([constituent]);
    const share = atNodes(nodesKeV, (side) =>
      energiesKeV.map(
        (energy) => subshellShares(constituent.z, side === 'above' ? energy : energy * BELOW, out)[shell],
      ),
    );
    return own.map((value, i) => (value * share[i]) / total[i]);
  };
}

/** Thick-target bremsstrahlung tables of a slot, one per emission cutoff; none where nothing radiates. */
export function makeRadiation(slot: Slot, topKeV: number, physics: Physics): BremsstrahlungTables[] {
  if (!physics.bremsstrahlung || slot.constituents.length === 0) return [];
  const slowing = sampleSlowing(slot);
  return RADIATION_CUTOFFS_KEV.filter((cutoff) => cutoff === 0 || 2 * cutoff < topKeV).map((cutoff) =>
    makeBremsstrahlungTables(slot, topKeV, Math.max(cutoff, physics.cutoffKeV), slowing),
  );
}
