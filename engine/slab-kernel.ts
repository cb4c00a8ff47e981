/**
 * The history loop for laterally infinite stacks: analog transport in depth z and direction cosine w alone.
 *
 * Hot code. State lives in locals; the random stream (alea, see random.ts), the logarithm of the flight and the cosine
 * of the azimuth are written out because a call for each costs as much as the work around it, and free-electron
 * scattering is written out for runs with plain physics (measured: through `interact` such runs lose a quarter of
 * their speed). Everything else that happens at a collision is `interact`'s.
 */
import { BUCKET_OFFSET, BUCKET_SHIFT } from './energy-grid.js';
import { addFigure, closeHistory, MAX_TOUCHED, type BatchTally } from './batch-tally.js';
import { ELECTRON_REST_KEV } from './constants.js';
import { lineEnergyKeV, pickLine } from './emission.js';
import { AZIMUTH_COSINE, AZIMUTH_STEPS, LOG_INVERSE, LOG_NEGATIVE, POWER_OF_TWO } from './lookup-tables.js';
import { COLUMNS, ROW_LENGTH, ROW_OFFSET, ROW_SHIFT } from './physics/incoherent.js';
import { interact, type Site } from './physics/interact.js';
import { CELL_LENGTH, type Problem } from './problem.js';
import { ALEA_CARRY, ALEA_MULTIPLIER } from './random.js';
import { startInSlab, type SlabStart } from './slab-source.js';
import { FIGURE } from './tally-layout.js';

/** Photons set free in one history that may wait at a time; more is an error. */
const STACK_DEPTH = 1024;
/** A deposit this close to the line's energy is the whole of it: rounding of the sums of deposits. */
const FULL_ENERGY = 1 - 1e-9;

const FAR = 1;
const FRONT = 2;

const stackEnergy = new Float64Array(STACK_DEPTH);
const stackW = new Float64Array(STACK_DEPTH);
const stackZ = new Float64Array(STACK_DEPTH);
const stackLayer = new Int32Array(STACK_DEPTH);
const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/** Plays `histories` histories with the stream in `site.random` into `tally`. */
export function runSlabBatch(problem: Problem, histories: number, site: Site, tally: BatchTally): void {
  const { boundariesCm, cells, cellCount, cutoffKeV, emission, incoherent, incoherentBase, layers, plain } =
    problem;
  const { slotOfLayer } = problem;
  const { nodesKeV, firstCell } = problem.grid;
  const { binGuide, binScale, edgesKeV, detectorOfLayer, bins, lines } = tally.layout;
  const { transmittedCell, reflectedCell, depositedCell, pulseHeightCell } = tally.layout;
  const { depositedFigure, interactingFigure, fullEnergyFigure } = tally.layout;
  const { pending, touched } = tally;
  const { random, secondaries } = site;
  const deposited = new Float64Array(layers);
  const start: SlabStart = { z: 0, w: 1, layer: 0 };
  let s0 = random[0];
  let s1 = random[1];
  let s2 = random[2];
  let carry = random[3];
  let t = 0;

  for (let history = 0; history < histories; history++) {
    // Birth of the source photon.
    random[0] = s0;
    random[1] = s1;
    random[2] = s2;
    random[3] = carry;
    const line = pickLine(emission, random);
    const sourceKeV = lineEnergyKeV(emission, line, random);
    startInSlab(problem, random, start);
    s0 = random[0];
    s1 = random[1];
    s2 = random[2];
    carry = random[3];
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
      // Cell of the energy grid.
      doubleView[0] = energyKeV;
      const high = wordView[1];
      let cell = firstCell[(high >>> BUCKET_SHIFT) - BUCKET_OFFSET];
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
        r * (1 - r * (0.5 - r * (1 / 3 - r * (0.25 - r * 0.2))));

      // Flight through layers to a collision or out of the stack.
      let left = 0;
      let slot = 0;
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
            left = FAR;
            break;
          }
        } else if (w < 0 && end < boundariesCm[layer]) {
          tau -= ((boundariesCm[layer] - z) * attenuation) / w;
          z = boundariesCm[layer];
          if (--layer < 0) {
            left = FRONT;
            break;
          }
        } else {
          z = end;
          break;
        }
      }

      let depositedKeV = 0;
      let alive = true;
      if (left !== 0) {
        // Out: score the photon where it left.
        let bin = binGuide[(energyKeV * binScale) | 0];
        while (energyKeV >= edgesKeV[bin + 1]) bin++;
        if (left === FAR) {
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
        alive = false;
      } else {
        collided = true;
        let v = 0;
        let emitted = 0;
        if (plain && cells[at + 4] + cells[at + 5] * energyKeV >= 1 - 1e-12) {
          // Plain physics and nothing but absorption and scattering possible here: written out for speed.
          t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
          s0 = s1;
          s1 = s2;
          carry = Math.floor(t);
          s2 = t - carry;
          if (s2 < cells[at + 2] + cells[at + 3] * energyKeV) {
            depositedKeV = energyKeV;
            alive = false;
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
            v = s * spread * inverse;
            const scatteredKeV = energyKeV * (1 + k) * (1 + k) * inverse;
            depositedKeV = energyKeV - scatteredKeV;
            if (scatteredKeV < cutoffKeV) {
              depositedKeV = energyKeV;
              alive = false;
            } else {
              energyKeV = scatteredKeV;
            }
          }
        } else {
          random[0] = s0;
          random[1] = s1;
          random[2] = s2;
          random[3] = carry;
          site.energyKeV = energyKeV;
          interact(problem, site, slot, cell);
          s0 = random[0];
          s1 = random[1];
          s2 = random[2];
          carry = random[3];
          depositedKeV = site.depositedKeV;
          energyKeV = site.energyKeV;
          v = site.v;
          alive = energyKeV > 0;
          emitted = secondaries.count;
        }

        // Energy left on the spot.
        if (depositedKeV > 0) {
          deposited[layer] += depositedKeV;
          let bin = binGuide[(depositedKeV * binScale) | 0];
          while (depositedKeV >= edgesKeV[bin + 1]) bin++;
          bin += depositedCell + layer * bins;
          pending[bin] += depositedKeV;
          touched[touchedCount++] = bin;
        }

        // Photons set free wait, with their direction cosine turned from that of the one that came in.
        for (let i = 0; i < emitted; i++) {
          if (waiting >= STACK_DEPTH)
            throw new Error(`more than ${STACK_DEPTH} photons waiting in one history`);
          const cosine = secondaries.cosine[i];
          let direction = -stackW[waiting - 1 < 0 ? 0 : waiting - 1];
          if (secondaries.opposite[i] === 0) {
            t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
            s0 = s1;
            s1 = s2;
            carry = Math.floor(t);
            s2 = t - carry;
            let part = s2 * AZIMUTH_STEPS;
            const step = part | 0;
            part -= step;
            const azimuth = AZIMUTH_COSINE[step] + part * (AZIMUTH_COSINE[step + 1] - AZIMUTH_COSINE[step]);
            const sine = (1 - cosine * cosine) * (1 - w * w);
            direction = w * cosine + (sine > 0 ? Math.sqrt(sine) * azimuth : 0);
          }
          stackEnergy[waiting] = secondaries.energyKeV[i];
          stackW[waiting] = direction;
          stackZ[waiting] = z;
          stackLayer[waiting] = layer;
          waiting++;
        }

        // New direction of the photon that goes on: azimuth uniform, so only its cosine enters.
        if (alive) {
          t = ALEA_MULTIPLIER * s0 + carry * ALEA_CARRY;
          s0 = s1;
          s1 = s2;
          carry = Math.floor(t);
          s2 = t - carry;
          let part = s2 * AZIMUTH_STEPS;
          const step = part | 0;
          part -= step;
          const azimuth = AZIMUTH_COSINE[step] + part * (AZIMUTH_COSINE[step + 1] - AZIMUTH_COSINE[step]);
          const sine = 4 * v * (1 - v) * (1 - w * w);
          w = w * (1 - 2 * v) + (sine > 0 ? Math.sqrt(sine) * azimuth : 0);
        }
      }

      // Room for the scores of the next flight; a history this long is an error.
      if (touchedCount > MAX_TOUCHED - 4) throw new Error(`more than ${MAX_TOUCHED} scores in one history`);

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

    // Figures of the history.
    addFigure(tally, FIGURE.incident, 1);
    addFigure(tally, FIGURE.sourceEnergy, sourceKeV);
    if (transmitted > 0) {
      addFigure(tally, FIGURE.transmitted, transmitted);
      addFigure(tally, FIGURE.transmittedEnergy, transmittedKeV);
      addFigure(tally, FIGURE.uncollided, uncollided);
    }
    if (reflected > 0) {
      addFigure(tally, FIGURE.reflected, reflected);
      addFigure(tally, FIGURE.reflectedEnergy, reflectedKeV);
    }
    for (let l = 0; l < layers; l++) {
      let pulseKeV = deposited[l];
      if (pulseKeV === 0) continue;
      deposited[l] = 0;
      addFigure(tally, depositedFigure + l, pulseKeV);
      if (pulseKeV <= cutoffKeV) continue;
      addFigure(tally, interactingFigure + l, 1);
      const detector = detectorOfLayer[l];
      if (detector < 0) continue;
      if (pulseKeV >= sourceKeV * FULL_ENERGY) {
        pulseKeV = sourceKeV;
        addFigure(tally, fullEnergyFigure + detector * lines + (lines > 1 ? line : 0), 1);
      }
      let bin = binGuide[(pulseKeV * binScale) | 0];
      while (pulseKeV >= edgesKeV[bin + 1]) bin++;
      bin += pulseHeightCell + detector * bins;
      pending[bin]++;
      touched[touchedCount++] = bin;
    }
    closeHistory(tally, touchedCount);
  }
  random[0] = s0;
  random[1] = s1;
  random[2] = s2;
  random[3] = carry;
}
