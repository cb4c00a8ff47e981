/** Setup in, compiled problem out. */
import { slotsOf, gridOf, makeCells } from './compile-slots.js';
import { makeChannels, makeDoppler, makeScatteringTables, makeRadiation } from './compile-physics.js';
import { makeEmissionTable, topEnergyKeV } from './emission.js';
import { sharedDoubles, type Problem } from './problem.js';
import type { Setup } from './setup.js';
import { makeTallyLayout } from './tally-layout.js';

/** Compiles a checked setup. */
export function compile(setup: Setup): Problem {
  const { physics, stack, source } = setup;
  const emission = makeEmissionTable(source.emission);
  const topKeV = topEnergyKeV(emission);
  const { slots, slotOfLayer } = slotsOf(stack);
  const grid = gridOf(slots, topKeV);
  return {
    kernel: 'slab',
    seed: setup.seed,
    grid,
    cellCount: grid.nodesKeV.length - 1,
    cells: makeCells(slots, grid, physics),
    layers: stack.length,
    boundariesCm: boundaries(setup),
    slotOfLayer,
    source: source.shape,
    beamCosine: source.shape.kind === 'beam' ? Math.cos((source.shape.angleDeg * Math.PI) / 180) : 1,
    sourceLayer: source.shape.kind === 'embedded' ? layerNumber(setup, source.shape.layer) : 0,
    emission,
    historyWeight: source.shape.kind === 'point' || source.shape.kind === 'disc' ? 0.5 : 1,
    cutoffKeV: physics.cutoffKeV,
    plain: !physics.doppler && !physics.fluorescence && !physics.bremsstrahlung,
    ...makeScatteringTables(slots, topKeV, physics),
    ...makeDoppler(slots, physics),
    ...makeChannels(slots, grid, physics),
    bremsstrahlung: makeRadiation(slots, topKeV, physics),
    tally: makeTallyLayout(setup),
  };
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
