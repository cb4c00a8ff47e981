/**
 * The history loop for laterally infinite stacks: analog transport in depth z and direction cosine w alone.
 *
 * Hot code. State lives in locals; the random stream (alea, see random.ts), the logarithm of the flight and the cosine
 * of the azimuth are written out because a call for each costs as much as the work around it, and free-electron
 * scattering is written out for runs with plain physics (measured: through `interact` such runs lose a quarter of
 * their speed). Everything else that happens at a collision is `interact`'s.
 */
import { BUCKET_OFFSET, BUCKET_SHIFT } from './energy-grid.js';
import { MAX_TOUCHED, type BatchTally } from './batch-tally.js';
import { ELECTRON_REST_KEV } from './constants.js';
import { lineEnergyKeV, pickLine } from './emission.js';
import { AZIMUTH_COSINE, AZIMUTH_STEPS, LOG_INVERSE, LOG_NEGATIVE, POWER_OF_TWO } from './lookup-tables.js';
import { DEPTH_OFFSET, DEPTH_SHIFT, DEPTH_STEPS } from './local-cutoff.js';
import { COLUMNS, ROW_LENGTH, ROW_OFFSET, ROW_SHIFT } from './physics/incoherent.js';
import { interact, type Site } from './physics/interact.js';
import { CELL_LENGTH, type Problem } from './problem.js';
import { ALEA_CARRY, ALEA_MULTIPLIER, nextUniform } from './random.js';
import { startInSlab, type SlabStart } from './slab-source.js';
import { FIGURE } from './tally-layout.js';

/** Photons set free in one history that may wait at a time; more is an error. */
const STACK_DEPTH = 1024;
/** A deposit this close to the line's energy is the whole of it: rounding of the sums of deposits. */
const FULL_ENERGY = 1 - 1e-9;

/** Why the inner loop was left. */
const LEFT_FAR = 1;
const LEFT_FRONT = 2;
const ABSORBED = 3;
const COLLIDED = 4;

/** Scores kept free for one photon of plain physics, whose collisions are not checked one by one. */
const TOUCH_MARGIN = 4096;
const TOO_MANY_WAITING = `more than ${STACK_DEPTH} photons waiting in one history`;
const TOO_MANY_SCORES = `more than ${MAX_TOUCHED} scores in one history`;

const stackEnergy = new Float64Array(STACK_DEPTH);
const stackW = new Float64Array(STACK_DEPTH);
const stackZ = new Float64Array(STACK_DEPTH);
const stackLayer = new Int32Array(STACK_DEPTH);
const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

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
  const { boundariesCm, cells, cellCount, cutoffKeV, emission, incoherent, incoherentBase, layers, plain } =
    problem;
  const { slotOfLayer, densityOfSlot, localCutoffKeV, radiationStep } = problem;
  const { nodesKeV, firstCell } = problem.grid;
  const { binGuide, binScale, unevenBins, edgesKeV, detectorOfLayer, bins, lines } = tally.layout;
  const { transmittedCell, reflectedCell, depositedCell, pulseHeightCell } = tally.layout;
  const { depositedFigure, interactingFigure, fullEnergyFigure } = tally.layout;
  const { cellSum, cellSquare, figureSum, figureSquare, pending, touched } = tally;
  const { random, secondaries } = site;
  const deposited = new Float64Array(layers);
  const start: SlabStart = { z: 0, w: 1, layer: 0 };
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
    let z = start.z;
    let w = start.w;
    let layer = start.layer;
    let collided = false;
    let waiting = 0;
    let touchedCount = 0;
    let transmitted = 0;
    let transmittedKeV = 0;
    let uncollided = 0;
    let reflected = 0;
    let reflectedKeV = 0;

    for (;;) {
      // One photon, flight by flight. No call stands in this inner loop: a call makes the compiler keep every local in
      // memory, which costs a third of the speed. What needs one leaves the loop and comes back.
      let event = 0;
      let cell = 0;
      let slot = 0;
      for (;;) {
        // Cell of the energy grid.
        doubleView[0] = energyKeV;
        const high = wordView[1];
        cell = firstCell[(high >>> BUCKET_SHIFT) - BUCKET_OFFSET];
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
            z = boundariesCm[layer + 1];
            if (++layer === layers) {
              event = LEFT_FAR;
              break;
            }
          } else if (w < 0 && end < boundariesCm[layer]) {
            tau -= ((boundariesCm[layer] - z) * attenuation) / w;
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
        if (!plain) {
          event = COLLIDED;
          break;
        }

        // Plain physics: absorption, or free-electron scattering by the table of incoherent.ts.
        t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
        s0 = s1;
        s1 = s2;
        carry = Math.floor(t);
        s2 = t - carry;
        let depositedKeV = energyKeV;
        if (s2 < cells[at + 2] + cells[at + 3] * energyKeV) {
          event = ABSORBED;
        } else {
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
          const v = s * spread * inverse;
          const scatteredKeV = energyKeV * (1 + k) * (1 + k) * inverse;
          if (scatteredKeV < cutoffKeV) {
            event = ABSORBED;
          } else {
            depositedKeV = energyKeV - scatteredKeV;
            energyKeV = scatteredKeV;
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
        }
        deposited[layer] += depositedKeV;
        if (event !== 0) break;
      }

      let alive = false;
      if (event === COLLIDED) {
        random[0] = s0;
        random[1] = s1;
        random[2] = s2;
        random[3] = carry;
        const toFront = z - boundariesCm[layer];
        const toFar = boundariesCm[layer + 1] - z;
        doubleView[0] = (toFront < toFar ? toFront : toFar) * densityOfSlot[slot];
        let depth = (wordView[1] >>> DEPTH_SHIFT) - DEPTH_OFFSET;
        if (depth < 0) depth = 0;
        else if (depth >= DEPTH_STEPS) depth = DEPTH_STEPS - 1;
        depth += slot * DEPTH_STEPS;
        site.localCutoffKeV = localCutoffKeV[depth];
        site.radiationStep = radiationStep[depth];
        site.energyKeV = energyKeV;
        interact(problem, site, slot, cell);
        alive = site.energyKeV > 0;

        // Energy left on the spot.
        const depositedKeV = site.depositedKeV;
        deposited[layer] += depositedKeV;

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
      }
      if (touchedCount > MAX_TOUCHED - TOUCH_MARGIN) throw new Error(TOO_MANY_SCORES);

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
  random[0] = s0;
  random[1] = s1;
  random[2] = s2;
  random[3] = carry;
}
