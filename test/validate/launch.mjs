// npm run validate [-- --quick] [names of files]: --quick cuts the samples of each check to a twentieth.
import { spawnSync } from 'node:child_process';

const words = process.argv.slice(2);
const run = spawnSync(
  process.execPath,
  [
    'node_modules/vitest/vitest.mjs',
    'run',
    '--config',
    'vitest.validate.config.ts',
    ...words.filter((word) => word !== '--quick'),
  ],
  { stdio: 'inherit', env: { ...process.env, VALIDATE_QUICK: words.includes('--quick') ? '1' : '' } },
);
process.exitCode = run.status ?? 1;
