/** Setup in, compiled problem out. */
import { slotsOf } from './compile-slots.js';
import { tablesOf } from './compile-tables.js';
import { PAIR_THRESHOLD_KEV } from './constants.js';
import { isDeep, makeDeepProblem } from './deep/choice.js';
import { makeDoseLines } from './dose-lines.js';
import { makeEmissionTable, topEnergyKeV } from './emission.js';
import { sharedDoubles, type Problem } from './problem.js';
import type { Physics, Setup } from './setup.js';
import { hasEdges, makeSolidProblem } from './solid/source.js';
import { makeTallyLayout } from './tally-layout.js';
import { uncollidedConstants } from './uncollided.js';

/** Compiles a checked setup. */
export function compile(setup: Setup): Problem {
  const { physics, stack, source } = setup;
  const emission = makeEmissionTable(source.emission);
  const topKeV = topEnergyKeV(emission);
  const { slots, slotOfLayer } = slotsOf(stack);
  const tables = tablesOf(slots, topKeV, physics);
  const beamCosine = source.shape.kind === 'beam' ? Math.cos((source.shape.angleDeg * Math.PI) / 180) : 1;
  const sourceLayer = source.shape.kind === 'embedded' ? layerNumber(setup, source.shape.layer) : 0;
  const solid = hasEdges(setup) ? makeSolidProblem(setup, beamCosine, sourceLayer) : null;
  const deep = isDeep(setup);
  const problem: Problem = {
    kernel: deep ? 'deep' : solid ? 'solid' : 'slab',
    seed: setup.seed,
    ...tables,
    cellCount: tables.grid.nodesKeV.length - 1,
    layers: stack.length,
    boundariesCm: boundaries(setup),
    slotOfLayer,
    source: source.shape,
    beamCosine,
    sourceLayer,
    emission,
    historyWeight:
      solid === null && (source.shape.kind === 'point' || source.shape.kind === 'disc') ? 0.5 : 1,
    cutoffKeV: physics.cutoffKeV,
    plain: isPlain(physics, topKeV),
    solid,
    doseLines: makeDoseLines(tables.grid, setup.tally.dose),
    faceDose: null,
    deep: null,
    tally: makeTallyLayout(setup, deep),
  };
  if (deep) return { ...problem, deep: makeDeepProblem(setup, problem) };
  const scoresDose = solid === null && setup.tally.dose.length > 0;
  return scoresDose
    ? { ...problem, faceDose: uncollidedConstants(problem, setup.tally.dosePoints) }
    : problem;
}

/** Whether nothing but absorption and incoherent scattering can happen, without secondaries or broadening. */
function isPlain(physics: Physics, topKeV: number): boolean {
  const pair = physics.pair && topKeV > PAIR_THRESHOLD_KEV;
  return !physics.coherent && !pair && !physics.doppler && !physics.fluorescence && !physics.bremsstrahlung;
}

function boundaries(setup: Setup): Float64Array {
  const depths = sharedDoubles(setup.stack.length + 1);
  setup.stack.forEach((layer, l) => {
    depths[l + 1] = depths[l] + layer.thicknessCm;
  });
  return depths;
}

function layerNumber(setup: Setup, name: string): number {
  return setup.stack.findIndex((layer) => layer.name === name);
}
