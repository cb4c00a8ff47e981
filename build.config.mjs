// Builds the package into dist/: compiled TypeScript beside the data tables it reads at run time.
import { execFileSync } from 'node:child_process';
import { chmodSync, cpSync, mkdirSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { rolldown } from 'rolldown';

rmSync('dist', { recursive: true, force: true });
execFileSync(process.execPath, ['node_modules/typescript/bin/tsc', '-p', 'tsconfig.build.json'], {
  stdio: 'inherit',
});
// Worker threads load one file. V8 takes constants of the same module for part of the code; those imported from another
// it reads through a cell, with checks, at every use, which costs the history loops a tenth of their speed.
const worker = 'dist/engine/batch-worker.js';
const bundle = await rolldown({ input: worker, platform: 'node', external: /^[^./]/ });
await bundle.write({ file: worker, format: 'esm' });
mkdirSync('dist/materials/data', { recursive: true });
for (const file of readdirSync('materials/data')) {
  if (file.endsWith('.arrow') || file === 'README.md') {
    cpSync(`materials/data/${file}`, `dist/materials/data/${file}`);
  }
}
const { setupJsonSchema } = await import('./dist/cli/setup-schema.js');
writeFileSync('dist/setup.schema.json', `${JSON.stringify(setupJsonSchema(), null, 2)}\n`);
const { sweepJsonSchema } = await import('./dist/cli/sweep/sweep-schema.js');
writeFileSync('dist/sweep.schema.json', `${JSON.stringify(sweepJsonSchema(), null, 2)}\n`);
chmodSync('dist/cli/main.js', 0o755);
