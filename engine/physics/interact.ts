/**
 * One interaction of a photon with a material, all processes: which process, what the photon becomes, what stays, and
 * what is set free. The history loops call it at each collision; they own flight, geometry and tallies.
 */
import { ELECTRON_REST_KEV, PAIR_THRESHOLD_KEV } from '../constants.js';
import { bucketOf } from '../energy-grid.js';
import { depthIndex } from '../local-cutoff.js';
import { CELL_LENGTH, type Problem } from '../problem.js';
import { ALEA_CARRY, nextOpenUniform, nextUniform, type StreamState } from '../random.js';
import type { BremsstrahlungTables } from './bremsstrahlung-tables.js';
import { emitBremsstrahlung, MAX_ELECTRON_PHOTONS } from './bremsstrahlung.js';
import { sampleCoherent } from './coherent.js';
import { sampleDoppler } from './doppler.js';
import { comptonEnergyRatio } from './klein-nishina.js';
import { sampleIncoherent } from './incoherent.js';
import { samplePhotoelectronCosine } from './photoelectron.js';
import { relax } from './relaxation.js';
import { Secondaries } from './secondaries.js';

/** What an interaction can be; `interact` returns one of these. */
export const PHOTOELECTRIC = 0;
export const INCOHERENT = 1;
export const COHERENT = 2;
export const PAIR = 3;

/** Room of a batch for the outcome of an interaction; made once, reused for each. */
export class Site {
  /** Photon in: its energy. Photon out: its energy, 0 when it is gone. */
  energyKeV = 0;
  /** v = (1 − cos θ)/2 of the photon that goes on. */
  v = 0;
  /** Energy left on the spot. */
  depositedKeV = 0;
  readonly secondaries = new Secondaries();
  readonly random: StreamState = new Float64Array(4);
  /** Photons below it deposit on the spot: the problem's cutoff, or what cannot get out of the layer from here. */
  localCutoffKeV = 0;
  /** Number of the emission cutoff that goes with it (local-cutoff.ts). */
  radiationStep = 0;
  /** Draws refused too often by the Doppler sampler (rare oddity, reported). */
  dopplerGivenUp = 0;
  /** Photons found outside the layer they were in (rare oddity; a run with many fails). */
  strayed = 0;
  /** Energies of one electron's photons, then their cosines to its first direction. */
  readonly electronPhotons = new Float64Array(2 * MAX_ELECTRON_PHOTONS);
  readonly electronFrames = new Float64Array(2 * MAX_ELECTRON_PHOTONS);
  readonly next = () => nextOpenUniform(this.random);

  /** Sets what cannot get out from so deep in a layer (g/cm² to its nearest face); see local-cutoff.ts. */
  setCutoffs({ localCutoffKeV, radiationStep }: Problem, slot: number, depthGPerCm2: number): void {
    const at = depthIndex(slot, depthGPerCm2);
    this.localCutoffKeV = localCutoffKeV[at];
    this.radiationStep = radiationStep[at];
  }
}

/**
 * Plays one interaction of a photon of `site.energyKeV` in material `slot`, at grid cell `cell`; the outcome is in
 * `site`.
 */
export function interact(problem: Problem, site: Site, slot: number, cell: number): number {
  const { cells } = problem;
  const energyKeV = site.energyKeV;
  const at = (slot * problem.cellCount + cell) * CELL_LENGTH;
  const pick = nextUniform(site.random);
  site.secondaries.count = 0;
  if (pick < cells[at + 2] + cells[at + 3] * energyKeV) {
    absorb(problem, site, slot, cell, nextUniform(site.random));
    return PHOTOELECTRIC;
  }
  if (pick < cells[at + 4] + cells[at + 5] * energyKeV) {
    scatter(problem, site, slot);
    return INCOHERENT;
  }
  if (energyKeV <= PAIR_THRESHOLD_KEV || pick < cells[at + 6] + cells[at + 7] * energyKeV) {
    scatterCoherently(problem, site, slot);
    return COHERENT;
  }
  producePair(problem, site, slot);
  return PAIR;
}

/** As `interact`, of a kind chosen by the caller; it must be possible at this energy. */
export function interactAs(kind: number, problem: Problem, site: Site, slot: number, cell: number): void {
  site.secondaries.count = 0;
  if (kind === PHOTOELECTRIC) absorb(problem, site, slot, cell, nextUniform(site.random));
  else if (kind === INCOHERENT) scatter(problem, site, slot);
  else if (kind === PAIR) producePair(problem, site, slot);
  else {
    scatterCoherently(problem, site, slot);
  }
}

/**
 * Photoelectric absorption: the shell of the vacancy, its relaxation, the photoelectron. `silence` is the uniform draw
 * that decides whether the photoelectron radiates.
 */
export function absorb(problem: Problem, site: Site, slot: number, cell: number, silence: number): void {
  const energyKeV = site.energyKeV;
  let electronKeV = energyKeV;
  let emittedKeV = 0;
  const channels = problem.channelCount[slot];
  if (channels > 0) {
    const u = nextUniform(site.random);
    const first = problem.channelBase[slot];
    let at = problem.channelTableBase[slot] + cell * channels * 2;
    for (let channel = first; channel < first + channels; channel++, at += 2) {
      if (u < problem.channelTable[at] + problem.channelTable[at + 1] * energyKeV) {
        const shell = problem.channelShell[channel];
        electronKeV = Math.max(0, energyKeV - problem.relaxation.bindingKeV[shell]);
        emittedKeV = relax(
          problem.relaxation,
          shell,
          energyKeV,
          site.localCutoffKeV,
          site.secondaries,
          site.random,
        );
        break;
      }
    }
  }
  const photons = brake(problem, site, slot, electronKeV, silence);
  if (photons > 0) emittedKeV += release(site, photons, samplePhotoelectronCosine(electronKeV, site.random));
  site.energyKeV = 0;
  site.depositedKeV = energyKeV - emittedKeV;
}

/** Coherent scattering: a new direction and nothing else. */
export function scatterCoherently(problem: Problem, site: Site, slot: number): void {
  site.v = sampleCoherent(problem.coherent, problem.coherentBase[slot], site.energyKeV, site.random);
  site.depositedKeV = 0;
}

/**
 * The rest of an incoherent scattering whose recoil electron radiates: `silence` was not below its chance of no photon,
 * `site.v` is the angle.
 */
export function radiateRecoil(
  problem: Problem,
  site: Site,
  slot: number,
  scatteredKeV: number,
  silence: number,
): void {
  const { energyKeV } = site;
  const electronKeV = energyKeV - scatteredKeV;
  const photons = brake(problem, site, slot, electronKeV, silence);
  const emittedKeV = release(site, photons, recoilCosine(energyKeV, site.v));
  const goesOn = scatteredKeV >= site.localCutoffKeV;
  site.energyKeV = goesOn ? scatteredKeV : 0;
  site.depositedKeV = (goesOn ? electronKeV : energyKeV) - emittedKeV;
}

/** Incoherent scattering: angle, Doppler-broadened energy, recoil electron. */
function scatter(problem: Problem, site: Site, slot: number): void {
  const energyKeV = site.energyKeV;
  const v = sampleIncoherent(
    problem.incoherent,
    problem.incoherentBase[slot],
    energyKeV,
    nextUniform(site.random),
  );
  let scatteredKeV = energyKeV * comptonEnergyRatio(energyKeV, v);
  const shells = problem.dopplerCount[slot];
  if (shells > 0 && energyKeV < problem.dopplerTopKeV) {
    const broadened = sampleDoppler(
      problem.doppler,
      problem.dopplerBase[slot],
      shells,
      energyKeV,
      v,
      site.random,
    );
    if (broadened > 0) scatteredKeV = broadened;
    else site.dopplerGivenUp++;
  }
  const electronKeV = energyKeV - scatteredKeV;
  const photons = brake(problem, site, slot, electronKeV, nextUniform(site.random));
  const emittedKeV = photons > 0 ? release(site, photons, recoilCosine(energyKeV, v)) : 0;
  site.v = v;
  if (scatteredKeV >= site.localCutoffKeV) {
    site.energyKeV = scatteredKeV;
    site.depositedKeV = electronKeV - emittedKeV;
  } else {
    site.energyKeV = 0;
    site.depositedKeV = energyKeV - emittedKeV;
  }
}

/** Pair production (in the field of nucleus or electron alike): two 511 keV quanta back to back, isotropic. */
export function producePair(problem: Problem, site: Site, slot: number): void {
  const energyKeV = site.energyKeV;
  const kineticKeV = energyKeV - PAIR_THRESHOLD_KEV;
  // The kinetic energy is shared evenly at random: the Bethe–Heitler spectrum is nearly flat.
  const electronKeV = kineticKeV * nextUniform(site.random);
  // At the energies that radiate, both fly forward: their mean angle is about m c² / E.
  let emittedKeV = release(site, brake(problem, site, slot, electronKeV, nextUniform(site.random)), 1);
  emittedKeV += release(
    site,
    brake(problem, site, slot, kineticKeV - electronKeV, nextUniform(site.random)),
    1,
  );
  if (site.localCutoffKeV <= ELECTRON_REST_KEV) {
    const cosine = 2 * nextUniform(site.random) - 1;
    site.secondaries.push(ELECTRON_REST_KEV, cosine, 0);
    site.secondaries.push(ELECTRON_REST_KEV, -cosine, 1);
    emittedKeV += PAIR_THRESHOLD_KEV;
  }
  site.energyKeV = 0;
  site.depositedKeV = energyKeV - emittedKeV;
}

/** Bremsstrahlung tables with the emission cutoff of this place. */
function radiationOf(problem: Problem, site: Site, slot: number): BremsstrahlungTables {
  const radiation = problem.bremsstrahlung[slot];
  return radiation[Math.min(site.radiationStep, radiation.length - 1)];
}

/**
 * Slows an electron (or positron: same yields) down to rest; its photons, if any, are in `site.electronPhotons`. A
 * `silence` below the chance of no photon ends it.
 */
function brake(problem: Problem, site: Site, slot: number, electronKeV: number, silence: number): number {
  if (electronKeV <= site.localCutoffKeV || problem.bremsstrahlung[slot].length === 0) return 0;
  const tables = radiationOf(problem, site, slot);
  if (silence < tables.silent[bucketOf(electronKeV)]) return 0;
  const first = silence + 0.5 * ALEA_CARRY;
  return emitBremsstrahlung(tables, electronKeV, first, site.next, site.electronPhotons, site.electronFrames);
}

/** Sets an electron's photons free; `cosine` is that of the electron's direction. Returns their energy. */
function release(site: Site, photons: number, cosine: number): number {
  const { electronPhotons, electronFrames, secondaries } = site;
  let radiatedKeV = 0;
  for (let i = 0; i < photons; i++) {
    const own = electronPhotons[MAX_ELECTRON_PHOTONS + i];
    const sines = Math.sqrt(Math.max(0, (1 - cosine * cosine) * (1 - own * own)));
    const turned = sines === 0 ? 0 : sines * Math.cos(Math.PI * nextUniform(site.random));
    radiatedKeV += electronPhotons[i];
    secondaries.push(electronPhotons[i], cosine * own + turned, 0);
    const last = secondaries.count - 1;
    secondaries.beta[last] = electronFrames[i];
    secondaries.electronCosine[last] = cosine;
    secondaries.turnedCosine[last] = electronFrames[MAX_ELECTRON_PHOTONS + i];
  }
  return radiatedKeV;
}

/** cos φ of a free recoil electron: cot φ = (1 + k) tan(θ/2). */
function recoilCosine(energyKeV: number, v: number): number {
  const cotangent = (1 + energyKeV / ELECTRON_REST_KEV) * Math.sqrt(v / (1 - v + 1e-300));
  return cotangent / Math.sqrt(1 + cotangent * cotangent);
}
