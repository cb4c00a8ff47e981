import { describe, expect, it } from 'vitest';
import type { Problem } from '../../engine/problem.js';
import { publishedRows } from '../published/csv.js';
import { expectNear } from './goodness.js';
import { figureOf, PLAIN, playSlab, type SlabLayer } from './slab-run.js';

const STACKS: Record<string, { stack: SlabLayer[]; detector: string }> = {
  'NaI 7.62 cm': { stack: [['NaI', 7.62, 'detector']], detector: 'l0' },
  'lead 3 cm': { stack: [['lead', 3, 'detector']], detector: 'l0' },
  'concrete 30 cm': { stack: [['concrete', 30, 'detector']], detector: 'l0' },
  'aluminium 0.05 cm + NaI 7.62 cm + lead 2 cm': {
    stack: [['aluminium', 0.05], ['NaI', 7.62, 'detector'], ['lead', 2]], // prettier-ignore
    detector: 'l1',
  },
};
const HISTORIES = 300_000;
const LAYER_QUANTITIES = ['full_energy', 'interacting', 'deposited_energy'];

const ROUTES = [
  { route: 'the written-out plain physics', change: (problem: Problem) => problem },
  { route: 'the interaction of all physics', change: (problem: Problem) => ({ ...problem, plain: false }) },
];

describe.each(ROUTES)('with every further process off, by $route', ({ change }) => {
  const rows = publishedRows('plain-physics-slabs');

  // Values computed by an independent C program; each within 4 combined standard errors, 32 of them: false alarm 0.2 %
  it.each(Object.entries(STACKS))(
    '%s gives the figures of an independent program',
    (name, { stack, detector }) => {
      const own = rows.filter((row) => row.case === name);
      expect(own).toHaveLength(8);
      const played = playSlab(
        { stack, energyKeV: Number(own[0].energy_keV), physics: PLAIN, seed: `plain ${name}` },
        HISTORIES,
        change,
      );
      for (const { quantity, mean, std_error } of own) {
        const layer = LAYER_QUANTITIES.includes(quantity) ? detector : null;
        expectNear(quantity, figureOf(played, quantity, layer), Number(mean), {
          expectedError: Number(std_error),
        });
      }
    },
  );
});
