/**
 * The history loop for laterally infinite stacks: analog transport in depth z and direction cosine w alone.
 *
 * Hot code. State lives in locals; the random stream (alea, see random.ts), the logarithm of the flight, the cosine of
 * the azimuth, scattering and Doppler broadening are written out, because a call for each costs as much as the work
 * around it (measured: through `interact` plain physics loses a quarter of its speed, all physics half). What is rarer is
 * played by the functions of interact.ts. A test holds this loop against them.
 */
import { AnalogDose } from '../analog-dose.js';
import { BUCKET_OFFSET, BUCKET_SHIFT } from '../energy-grid.js';
import { MAX_TOUCHED, type BatchTally } from '../batch-tally.js';
import { scoreCoincidences } from '../coincidence.js';
import { ELECTRON_REST_KEV, HC_KEV_ANGSTROM, PAIR_THRESHOLD_KEV } from '../constants.js';
import { lineEnergyKeV, pickLine } from '../emission.js';
import { AZIMUTH_COSINE, AZIMUTH_STEPS, LOG_INVERSE, LOG_NEGATIVE, POWER_OF_TWO } from '../lookup-tables.js';
import { depthIndex, RADIATION_STEPS } from '../local-cutoff.js';
import { COLUMNS, ROW_LENGTH, ROW_OFFSET, ROW_SHIFT } from '../physics/incoherent.js';
import {
  COHERENT_GUIDE,
  COHERENT_NODES,
  GUIDE_PLACE,
  TOP_OFFSET,
  TOP_PLACE,
  TOP_SHIFT,
} from '../physics/coherent.js';
import { absorb, producePair, radiateRecoil, type Site } from '../physics/interact.js';
import { MAX_TRIES, MOMENTUM_LIMIT, PROFILE_STEPS } from '../physics/doppler.js';
import { CELL_LENGTH, type Problem } from '../problem.js';
import { ALEA_CARRY, ALEA_MULTIPLIER, nextUniform } from '../random.js';
import { startInSlab, type SlabStart } from './source.js';
import { FIGURE } from '../tally-layout.js';

/** Photons set free in one history that may wait at a time; more is an error. */
const STACK_DEPTH = 1024;
/** A deposit this close to the line's energy is the whole of it: rounding of the sums of deposits. */
const FULL_ENERGY = 1 - 1e-9;

/** Why the inner loop was left. */
const LEFT_FAR = 1;
const LEFT_FRONT = 2;
const ABSORBED = 3;
/** From here on: collisions that set photons free or need a rarer law, played by the functions of interact.ts. */
const ABSORBING = 4;
const PAIR = 5;
const RADIATING = 6;

const TOO_MANY_WAITING = `more than ${STACK_DEPTH} photons waiting in one history`;
const TOO_MANY_SCORES = `more than ${MAX_TOUCHED} scores in one history`;

const stackEnergy = new Float64Array(STACK_DEPTH);
const stackW = new Float64Array(STACK_DEPTH);
const stackZ = new Float64Array(STACK_DEPTH);
const stackLayer = new Int32Array(STACK_DEPTH);
const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/** The highest local cutoff of each layer, which is that of its middle. */
function highestCutoffs(problem: Problem): Float64Array {
  const { boundariesCm, cutoffKeV, densityOfSlot, localCutoffKeV, plain, slotOfLayer } = problem;
  return Float64Array.from({ length: problem.layers }, (_, layer) => {
    const slot = slotOfLayer[layer];
    const halfCm = 0.5 * (boundariesCm[layer + 1] - boundariesCm[layer]);
    return plain ? cutoffKeV : localCutoffKeV[depthIndex(slot, halfCm * densityOfSlot[slot])];
  });
}

/** Direction cosine to z after a turn by an angle of the given cosine, at azimuth π u. */
function turnCosine(w: number, cosine: number, u: number): number {
  const step = (u * AZIMUTH_STEPS) | 0;
  const part = u * AZIMUTH_STEPS - step;
  const azimuth = AZIMUTH_COSINE[step] + part * (AZIMUTH_COSINE[step + 1] - AZIMUTH_COSINE[step]);
  const sine = (1 - cosine * cosine) * (1 - w * w);
  return w * cosine + (sine > 0 ? Math.sqrt(sine) * azimuth : 0);
}

/** Plays `histories` histories with the stream in `site.random` into `tally`. */
export function runSlabBatch(problem: Problem, histories: number, site: Site, tally: BatchTally): void {
  const { boundariesCm, cells, cellCount, cutoffKeV, emission, layers } = problem;
  const { coherent, coherentBase, incoherent, incoherentBase } = problem;
  const full = !problem.plain;
  const highestCutoffKeV = highestCutoffs(problem);
  const { reachableKeV, dopplerBase, dopplerCount, dopplerTopKeV, silent, silentBase } = problem;
  const { alias, bindingKeV, keep, momenta, profile } = problem.doppler;
  const radiates = silent.length > 0;
  const { slotOfLayer, densityOfSlot, localCutoffKeV, radiationStep } = problem;
  const { nodesKeV, firstCell } = problem.grid;
  const { binGuide, binScale, unevenBins, edgesKeV, detectorOfLayer, bins, lines } = tally.layout;
  const { transmittedCell, reflectedCell, depositedCell, pulseHeightCell } = tally.layout;
  const { depositedFigure, interactingFigure, fullEnergyFigure, coincidence } = tally.layout;
  const { cellSum, cellSquare, figureSum, figureSquare, pending, touched } = tally;
  const { random, secondaries } = site;
  const deposited = new Float64Array(layers);
  const faceDose = problem.faceDose === null ? null : new AnalogDose(problem, tally);
  const start: SlabStart = { place: new Float64Array([0, 1]), layer: 0 };
  const onlyKeV = emission.lowKeV[0];
  const fixedStart =
    problem.source.kind === 'beam' && emission.lowKeV.length === 1 && emission.highKeV[0] === onlyKeV;
  startInSlab(problem, random, start);
  let sourceSumKeV = 0;
  let sourceSquare = 0;
  let s0 = random[0];
  let s1 = random[1];
  let s2 = random[2];
  let carry = random[3];
  let t = 0;

  for (let history = 0; history < histories; history++) {
    // Birth of the source photon; a beam of one line needs no draw.
    let line = 0;
    let sourceKeV = onlyKeV;
    if (!fixedStart) {
      random[0] = s0;
      random[1] = s1;
      random[2] = s2;
      random[3] = carry;
      line = pickLine(emission, random);
      sourceKeV = lineEnergyKeV(emission, line, random);
      startInSlab(problem, random, start);
      s0 = random[0];
      s1 = random[1];
      s2 = random[2];
      carry = random[3];
    }
    sourceSumKeV += sourceKeV;
    sourceSquare += sourceKeV * sourceKeV;
    let energyKeV = sourceKeV;
    let z = start.place[0];
    let w = start.place[1];
    let layer = start.layer | 0;
    let collided = false;
    let waiting = 0;
    let touchedCount = 0;
    let transmitted = 0;
    let transmittedKeV = 0;
    let uncollided = 0;
    let reflected = 0;
    let reflectedKeV = 0;

    for (;;) {
      // One photon, flight by flight. No call stands in this inner loop but those of functions so small that the compiler
      // puts them in their place: a call makes it keep every local in memory, which costs a third of the speed. What needs
      // one leaves the loop and comes back.
      let event = 0;
      let cell = 0;
      let bucket = 0;
      let slot = 0;
      let depth = 0;
      let v = 0;
      let scatteredKeV = 0;
      let loud = false;
      for (;;) {
        // Cell of the energy grid.
        doubleView[0] = energyKeV;
        const high = wordView[1];
        bucket = (high >>> BUCKET_SHIFT) - BUCKET_OFFSET;
        cell = firstCell[bucket];
        while (energyKeV >= nodesKeV[cell + 1]) cell++;

        // Optical length of the flight: −ln u from the bits of u, a second draw filling the bits of a small one.
        t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
        s0 = s1;
        s1 = s2;
        carry = Math.floor(t);
        s2 = t - carry;
        let u = s2;
        if (u < 1 / 1024) {
          t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
          s0 = s1;
          s1 = s2;
          carry = Math.floor(t);
          s2 = t - carry;
          u += (s2 + 0.5 * ALEA_CARRY) * ALEA_CARRY;
        }
        doubleView[0] = u;
        const word = wordView[1];
        const exponent = 1023 - (word >>> 20);
        const interval = (word >>> 12) & 255;
        const r = u * POWER_OF_TWO[exponent] * LOG_INVERSE[interval] - 1;
        let tau =
          LOG_NEGATIVE[interval] +
          exponent * 0.6931471805599453 -
          r * (1 - r * (0.5 - r * (1 / 3 - r * 0.25)));

        // Flight through layers to a collision or out of the stack.
        let at = 0;
        for (;;) {
          slot = slotOfLayer[layer];
          at = (slot * cellCount + cell) * CELL_LENGTH;
          const attenuation = cells[at] + cells[at + 1] * energyKeV;
          const end = z + (w * tau) / attenuation;
          if (w > 0 && end > boundariesCm[layer + 1]) {
            tau -= ((boundariesCm[layer + 1] - z) * attenuation) / w;
            // Rounding must not leave a length of 0, which has no end in vacuum.
            if (tau <= 0) tau = Number.MIN_VALUE;
            z = boundariesCm[layer + 1];
            if (++layer === layers) {
              event = LEFT_FAR;
              break;
            }
          } else if (w < 0 && end < boundariesCm[layer]) {
            tau -= ((boundariesCm[layer] - z) * attenuation) / w;
            if (tau <= 0) tau = Number.MIN_VALUE;
            z = boundariesCm[layer];
            if (--layer < 0) {
              event = LEFT_FRONT;
              break;
            }
          } else {
            z = end;
            break;
          }
        }
        if (event !== 0) break;
        collided = true;

        // Which process.
        t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
        s0 = s1;
        s1 = s2;
        carry = Math.floor(t);
        s2 = t - carry;
        const pick = s2;
        if (pick < cells[at + 2] + cells[at + 3] * energyKeV) {
          // A call is needed where a shell's photon could get out, or the photoelectron may radiate: its chance of
          // silence is at least that of an electron with all the energy.
          const reachKeV = reachableKeV[slot * cellCount + cell];
          if (radiates) {
            t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
            s0 = s1;
            s1 = s2;
            carry = Math.floor(t);
            s2 = t - carry;
            loud = s2 >= silent[silentBase[slot * RADIATION_STEPS] + bucket];
          }
          if (loud || reachKeV > cutoffKeV) {
            const nearest = Math.min(z - boundariesCm[layer], boundariesCm[layer + 1] - z);
            depth = depthIndex(slot, nearest * densityOfSlot[slot]);
            const lowestKeV = localCutoffKeV[depth];
            loud &&=
              energyKeV > lowestKeV &&
              s2 >= silent[silentBase[slot * RADIATION_STEPS + radiationStep[depth]] + bucket];
            if (loud || reachKeV > lowestKeV) {
              event = ABSORBING;
              break;
            }
          }
          deposited[layer] += energyKeV;
          event = ABSORBED;
          break;
        }
        if (pick >= cells[at + 4] + cells[at + 5] * energyKeV) {
          if (energyKeV > PAIR_THRESHOLD_KEV && pick >= cells[at + 6] + cells[at + 7] * energyKeV) {
            event = PAIR;
            break;
          }
          // Coherent scattering, the law and the draws of coherent.ts.
          const base = coherentBase[slot];
          const row = base + TOP_PLACE + (high >>> TOP_SHIFT) - TOP_OFFSET;
          const betweenRows = (high & ((1 << TOP_SHIFT) - 1)) * (1 / (1 << TOP_SHIFT));
          const top = coherent[row] + betweenRows * (coherent[row + 1] - coherent[row]);
          const perQ = (HC_KEV_ANGSTROM * HC_KEV_ANGSTROM) / (energyKeV * energyKeV);
          const values = base + COHERENT_NODES;
          for (;;) {
            t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
            s0 = s1;
            s1 = s2;
            carry = Math.floor(t);
            s2 = t - carry;
            const a = s2 * top;
            let i = coherent[base + GUIDE_PLACE + ((a * COHERENT_GUIDE) | 0)] | 0;
            while (a >= coherent[values + i + 1]) i++;
            const part = (a - coherent[values + i]) / (coherent[values + i + 1] - coherent[values + i]);
            v = Math.min(
              1,
              (coherent[base + i] + part * (coherent[base + i + 1] - coherent[base + i])) * perQ,
            );
            t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
            s0 = s1;
            s1 = s2;
            carry = Math.floor(t);
            s2 = t - carry;
            if (2 * s2 <= 1 + (1 - 2 * v) * (1 - 2 * v)) break;
          }
        } else {
          // Incoherent scattering: v = (1 − cos θ)/2 by the table of incoherent.ts.
          t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
          s0 = s1;
          s1 = s2;
          carry = Math.floor(t);
          s2 = t - carry;
          let part = Math.sqrt(s2) * COLUMNS;
          const column = part | 0;
          part -= column;
          const lower = incoherentBase[slot] + ((high >>> ROW_SHIFT) - ROW_OFFSET) * ROW_LENGTH + column;
          const upper = lower + ROW_LENGTH;
          const betweenRows = (high & ((1 << ROW_SHIFT) - 1)) * (1 / (1 << ROW_SHIFT));
          const low = incoherent[lower] + part * (incoherent[lower + 1] - incoherent[lower]);
          const up = incoherent[upper] + part * (incoherent[upper + 1] - incoherent[upper]);
          const s = low + betweenRows * (up - low);
          // v = s / (1 + k) and the energy ratio 1 / (1 + 2 k v) by one division.
          const k = energyKeV * (1 / ELECTRON_REST_KEV);
          const spread = 1 + k + 2 * k * s;
          const inverse = 1 / ((1 + k) * spread);
          v = s * spread * inverse;
          scatteredKeV = energyKeV * (1 + k) * (1 + k) * inverse;

          // Doppler broadening, the law and the draws of doppler.ts.
          const shells = dopplerCount[slot];
          if (shells > 0 && energyKeV < dopplerTopKeV) {
            let tries = 0;
            for (; tries < MAX_TRIES; tries++) {
              t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
              s0 = s1;
              s1 = s2;
              carry = Math.floor(t);
              s2 = t - carry;
              const place = s2 * shells;
              let shell = dopplerBase[slot] + (place | 0);
              if (place - (place | 0) >= keep[shell]) shell = alias[shell];
              t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
              s0 = s1;
              s1 = s2;
              carry = Math.floor(t);
              s2 = t - carry;
              const sign = 2 * ((s2 * 2) | 0) - 1;
              const tail = Math.sqrt(1 - Math.abs(2 * s2 - 1)) * PROFILE_STEPS;
              const step = tail < PROFILE_STEPS ? tail | 0 : PROFILE_STEPS - 1;
              const node = profile[shell] + step;
              const size = momenta[node] + (tail - step) * (momenta[node + 1] - momenta[node]);
              // Kept where the transfer and the momentum together free the electron: p ≤ p_max, without its division.
              const left = energyKeV - bindingKeV[shell];
              const most = 2 * k * left * v - bindingKeV[shell];
              const bound = bindingKeV[shell] * bindingKeV[shell] + 4 * energyKeV * left * v;
              const p = sign * size;
              if (left <= 0 || p * size * bound > most * Math.abs(most) || p <= -MOMENTUM_LIMIT) continue;
              const a = 1 + 2 * k * v;
              const b = a - p * p * (1 - 2 * v);
              const root = p * Math.sqrt(4 * v * (v * (1 + k) * (1 + k) + (1 - v) * (1 - p * p)));
              scatteredKeV = (energyKeV * (b + root)) / (a * a - p * p);
              break;
            }
            if (tries === MAX_TRIES) site.dopplerGivenUp++;
          }

          // The recoil electron may radiate: a draw below the chance of no photon settles most cases here. What cannot get
          // out of the layer deposits on the spot (local-cutoff.ts); most photons are above all local cutoffs of it.
          const depositedKeV = energyKeV - scatteredKeV;
          loud = false;
          if (radiates && depositedKeV > cutoffKeV) {
            doubleView[0] = depositedKeV;
            bucket = (wordView[1] >>> BUCKET_SHIFT) - BUCKET_OFFSET;
            t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
            s0 = s1;
            s1 = s2;
            carry = Math.floor(t);
            s2 = t - carry;
            loud = s2 >= silent[silentBase[slot * RADIATION_STEPS] + bucket];
          }
          if (loud || scatteredKeV < highestCutoffKeV[layer]) {
            const nearest = Math.min(z - boundariesCm[layer], boundariesCm[layer + 1] - z);
            depth = depthIndex(slot, nearest * densityOfSlot[slot]);
            const lowestKeV = full ? localCutoffKeV[depth] : cutoffKeV;
            loud &&=
              depositedKeV > lowestKeV &&
              s2 >= silent[silentBase[slot * RADIATION_STEPS + radiationStep[depth]] + bucket];
            if (loud) {
              event = RADIATING;
              break;
            }
            if (scatteredKeV < lowestKeV) {
              deposited[layer] += energyKeV;
              event = ABSORBED;
              break;
            }
          }
          deposited[layer] += depositedKeV;
          energyKeV = scatteredKeV;
        }

        // New direction: the azimuth is uniform and only its cosine enters.
        t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
        s0 = s1;
        s1 = s2;
        carry = Math.floor(t);
        s2 = t - carry;
        let turn = s2 * AZIMUTH_STEPS;
        const step = turn | 0;
        turn -= step;
        const azimuth = AZIMUTH_COSINE[step] + turn * (AZIMUTH_COSINE[step + 1] - AZIMUTH_COSINE[step]);
        const sine = 4 * v * (1 - v) * (1 - w * w);
        w = w * (1 - 2 * v) + (sine > 0 ? Math.sqrt(sine) * azimuth : 0);
      }

      let alive = false;
      if (event >= ABSORBING) {
        random[0] = s0;
        random[1] = s1;
        random[2] = s2;
        random[3] = carry;
        if (event === PAIR) {
          const nearest = Math.min(z - boundariesCm[layer], boundariesCm[layer + 1] - z);
          depth = depthIndex(slot, nearest * densityOfSlot[slot]);
        }
        secondaries.count = 0;
        site.energyKeV = energyKeV;
        site.localCutoffKeV = localCutoffKeV[depth];
        site.radiationStep = radiationStep[depth];
        if (event === ABSORBING) {
          absorb(problem, site, slot, cell, s2);
        } else if (event === RADIATING) {
          site.v = v;
          radiateRecoil(problem, site, slot, scatteredKeV, s2);
        } else {
          producePair(problem, site, slot);
        }
        alive = site.energyKeV > 0;

        deposited[layer] += site.depositedKeV;

        // Photons set free wait, with their direction cosine turned from that of the one that came in.
        const emitted = secondaries.count;
        if (waiting + emitted > STACK_DEPTH) throw new Error(TOO_MANY_WAITING);
        for (let i = 0; i < emitted; i++) {
          stackEnergy[waiting] = secondaries.energyKeV[i];
          stackW[waiting] =
            secondaries.opposite[i] === 1
              ? -stackW[waiting - 1]
              : turnCosine(w, secondaries.cosine[i], nextUniform(random));
          stackZ[waiting] = z;
          stackLayer[waiting] = layer;
          waiting++;
        }
        if (alive) {
          energyKeV = site.energyKeV;
          w = turnCosine(w, 1 - 2 * site.v, nextUniform(random));
        }
        s0 = random[0];
        s1 = random[1];
        s2 = random[2];
        carry = random[3];
      } else if (event !== ABSORBED) {
        // Out: score the photon where it left.
        let bin = (energyKeV * binScale) | 0;
        if (unevenBins) {
          bin = binGuide[bin];
          while (energyKeV >= edgesKeV[bin + 1]) bin++;
        }
        if (event === LEFT_FAR) {
          transmitted++;
          transmittedKeV += energyKeV;
          if (!collided) uncollided = 1;
          bin += transmittedCell;
        } else {
          reflected++;
          reflectedKeV += energyKeV;
          bin += reflectedCell;
        }
        pending[bin]++;
        touched[touchedCount++] = bin;
        if (faceDose !== null) faceDose.leave(event === LEFT_FAR, energyKeV, cell, w);
      }
      if (touchedCount === MAX_TOUCHED) throw new Error(TOO_MANY_SCORES);

      // The next photon of the history, if any waits.
      if (!alive) {
        if (waiting === 0) break;
        waiting--;
        energyKeV = stackEnergy[waiting];
        w = stackW[waiting];
        z = stackZ[waiting];
        layer = stackLayer[waiting];
      }
    }

    // Figures of the history: sums and sums of squares.
    if (transmitted > 0) {
      figureSum[FIGURE.transmitted] += transmitted;
      figureSquare[FIGURE.transmitted] += transmitted * transmitted;
      figureSum[FIGURE.transmittedEnergy] += transmittedKeV;
      figureSquare[FIGURE.transmittedEnergy] += transmittedKeV * transmittedKeV;
      figureSum[FIGURE.uncollided] += uncollided;
      figureSquare[FIGURE.uncollided] += uncollided;
    }
    if (reflected > 0) {
      figureSum[FIGURE.reflected] += reflected;
      figureSquare[FIGURE.reflected] += reflected * reflected;
      figureSum[FIGURE.reflectedEnergy] += reflectedKeV;
      figureSquare[FIGURE.reflectedEnergy] += reflectedKeV * reflectedKeV;
    }
    if (faceDose !== null) faceDose.closeHistory();
    if (coincidence !== null) scoreCoincidences(tally, deposited, sourceKeV, line, 1);
    for (let l = 0; l < layers; l++) {
      let pulseKeV = deposited[l];
      if (pulseKeV === 0) continue;
      deposited[l] = 0;
      figureSum[depositedFigure + l] += pulseKeV;
      figureSquare[depositedFigure + l] += pulseKeV * pulseKeV;
      const whole = pulseKeV >= sourceKeV * FULL_ENERGY;
      if (whole) pulseKeV = sourceKeV;
      let bin = (pulseKeV * binScale) | 0;
      if (unevenBins) {
        bin = binGuide[bin];
        while (pulseKeV >= edgesKeV[bin + 1]) bin++;
      }
      // A layer scores once per history: straight into the sums.
      const cell = depositedCell + l * bins + bin;
      cellSum[cell] += pulseKeV;
      cellSquare[cell] += pulseKeV * pulseKeV;
      if (pulseKeV <= cutoffKeV) continue;
      figureSum[interactingFigure + l]++;
      const detector = detectorOfLayer[l];
      if (detector < 0) continue;
      if (whole) figureSum[fullEnergyFigure + detector * lines + (lines > 1 ? line : 0)]++;
      cellSum[pulseHeightCell + detector * bins + bin]++;
      cellSquare[pulseHeightCell + detector * bins + bin]++;
    }

    // Photons that left, cell by cell: a cell scored twice counts with the square of its sum.
    for (let i = 0; i < touchedCount; i++) {
      const scored = touched[i];
      const value = pending[scored];
      if (value !== 0) {
        cellSum[scored] += value;
        cellSquare[scored] += value * value;
        pending[scored] = 0;
      }
    }
  }

  // What every history adds, and counts whose squares are themselves.
  figureSum[FIGURE.incident] += histories;
  figureSquare[FIGURE.incident] += histories;
  figureSum[FIGURE.sourceEnergy] += sourceSumKeV;
  figureSquare[FIGURE.sourceEnergy] += sourceSquare;
  for (let figure = interactingFigure; figure < tally.layout.figures; figure++) {
    figureSquare[figure] = figureSum[figure];
  }
  if (faceDose !== null) faceDose.closeBatch(histories);
  random[0] = s0;
  random[1] = s1;
  random[2] = s2;
  random[3] = carry;
}
