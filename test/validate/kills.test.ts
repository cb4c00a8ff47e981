/** Fifty SIGKILLs at random moments; the everyday tests have a few of them. */
import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { arrowFiles, runKilled } from '../cli/kills.js';
import { runCli } from '../cli/run-cli.js';

const KILLS = 50;

const setup = (histories: string) => `title: Shielded crystal
source: {kind: beam, energy: 661.7 keV}
stack:
  - {name: shield, material: lead, thickness: 1 cm}
  - {name: crystal, material: NaI, thickness: 5 cm, detector: {}}
tally: {energy_bins: {width: 10 keV}}
run: {histories: ${histories}}
`;

let folder: string;
beforeAll(() => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-kills-'));
  fs.writeFileSync(join(folder, 'run.yaml'), setup('3e7'));
  fs.writeFileSync(join(folder, 'base.yaml'), setup('4e5'));
  const vary =
    'stack.shield.thickness: {from: 1 mm, to: 2 cm, count: 40}\n  source.energy: [300 keV, 661.7 keV]';
  fs.writeFileSync(join(folder, 'sweep.yaml'), `spectra: true\nbase: base.yaml\nvary:\n  ${vary}\n`);
});
afterAll(() => fs.rmSync(folder, { recursive: true }));

test.each([
  ['run', 'run.yaml'],
  ['sweep', 'sweep.yaml'],
])(
  'a %s killed 50 times and resumed each time ends with the files of an undisturbed one',
  async (command, file) => {
    const args = [command, file, '--quiet', '--checkpoint', '100 ms'];
    const plan = { cwd: folder, kills: KILLS, seed: command, lifeMs: [500, 1400] as const };
    const { killed, code, stderr } = await runKilled(
      [...args, '--out', `${command}-killed`, '--resume'],
      plan,
    );
    expect({ killed, code, stderr }).toEqual({ killed: KILLS, code: 0, stderr: '' });
    expect((await runCli([...args, '--out', `${command}-whole`], { cwd: folder })).code).toBe(0);
    expect(arrowFiles(join(folder, `${command}-killed`))).toEqual(
      arrowFiles(join(folder, `${command}-whole`)),
    );
  },
);
