import { beforeAll, expect, test } from 'vitest';
import {
  decodeState,
  encodeState,
  joinShards,
  Run,
  Simulator,
  type RunResult,
  type RunState,
  type Setup,
} from '../../engine/index.js';
import { parseSetup } from '../../cli/setup-reader.js';

const SETUP = `title: Wall
source: {kind: point, distance: 1 m, nuclide: Co-60}
stack:
  - {name: wall, material: ordinary concrete, thickness: 60 cm}
  - {name: shield, material: lead, thickness: 5 cm}
tally:
  dose: [air_kerma, ambient_dose]
  dose_points: [{name: corridor, behind: 30 cm}]
  depth_profile: {layer: shield, bins: 20}
run: {histories: 5e4, transport: deep}
`;

const setup: Setup = parseSetup(SETUP).setup;
const facts = ({ totals, spectra, depth, histories, balance, warnings }: RunResult) => ({
  totals,
  spectra,
  depth,
  histories,
  balance,
  warnings,
});
const stored = (state: RunState): RunState => decodeState(encodeState(state, '')).state;

/** Plays runs one after the other in threads of their own. */
async function play(...runs: Run[]): Promise<void> {
  const simulator = new Simulator(2);
  const waiting = [...runs];
  await simulator.play({ next: () => waiting.shift() ?? null });
  await simulator.close();
}

let whole: RunResult;
beforeAll(async () => {
  const run = new Run(setup);
  await play(run);
  whole = run.result();
  expect(whole.totals.filter(({ layer }) => layer === 'corridor').length).toBeGreaterThan(0);
});

test('deep transport with dose points goes on from a saved state to the bits of the undisturbed run', async () => {
  const part = new Run(setup, { batches: 2 });
  await play(part);
  const rest = new Run(setup, { from: stored(part.state()) });
  await play(rest);
  expect(facts(rest.result())).toEqual(facts(whole));
});

test('deep transport with dose points can be cut into shards and joined to the bit', async () => {
  const shards = [1, 2, 3].map((index) => new Run(setup, { shard: { index, count: 3 } }));
  await play(...shards);
  const states = shards.map((run) => stored(run.state()));
  expect(facts(joinShards(setup, states))).toEqual(facts(whole));
});
