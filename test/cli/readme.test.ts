/**
 * Every example of README.md is run in one empty folder, in the order in which they stand there. A `yaml` or `js`
 * block that begins with a file name is written to that file, the lines of an `sh` block are run, and a `text` block
 * must be what the last command before it printed, times apart. After a change that is meant to change figures,
 * UPDATE_README=1 writes the new ones.
 */
import { execFileSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readFileSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { runShell } from './run-cli.js';

interface Block {
  readonly language: string;
  readonly content: string;
}

const readme = readFileSync('README.md', 'utf8');
const blocks: Block[] = [...readme.matchAll(/^```(\w+)\n([^]*?)^```$/gm)].map(([, language, content]) => ({
  language,
  content,
}));

const TIMES = /^.* histories per second$/gm;
const timeless = (text: string): string => text.replace(TIMES, '(times)').trim();

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'thickset-readme-'));
  mkdirSync(join(folder, 'node_modules'));
  symlinkSync(process.cwd(), join(folder, 'node_modules', 'thickset'));
  writeFileSync(join(folder, 'package.json'), '{"type": "module"}');
});
afterAll(() => rmSync(folder, { recursive: true }));

const printed: string[] = [];

/** The commands of the quick start are those of package.json; here they run without building once more. */
async function run(content: string): Promise<string> {
  if (content === 'npm ci\nnpm run demo\n') {
    const { scripts } = JSON.parse(readFileSync('package.json', 'utf8')) as { scripts: { demo: string } };
    expect(scripts.demo).toMatch(/^npm run build && /);
    return execFileSync('sh', ['-c', scripts.demo.replace('npm run build && ', '')], { encoding: 'utf8' });
  }
  let last = '';
  for (const line of content.trim().split('\n')) {
    const { code, stdout, stderr } = await runShell(line.replace(/^thickset\b/, '$THICKSET'), {
      cwd: folder,
    });
    expect({ line, code, stderr }).toEqual({ line, code: 0, stderr: '' });
    last = stdout;
  }
  return last;
}

describe('the README', () => {
  test.each(blocks.map(({ language, content }, at) => [at, language, content] as const))(
    'block %i, %s',
    async (at, language, content) => {
      if (language === 'sh') {
        printed[at] = await run(content);
        expect(printed[at]).not.toBe('');
      } else if (language === 'text') {
        if (!process.env.UPDATE_README) {
          expect(timeless(content)).toBe(timeless(printed[at - 1]));
        }
        expect(blocks[at - 1].language).toBe('sh');
      } else {
        const name = /^(?:#|\/\/) ([\w-]+\.(?:yaml|js))\n/.exec(content)?.[1];
        expect(name).toBeDefined();
        writeFileSync(join(folder, name as string), content);
      }
    },
  );

  test.runIf(process.env.UPDATE_README)('has the new outputs now', () => {
    let at = 0;
    const renewed = readme.replaceAll(/^```(\w+)\n([^]*?)^```$/gm, (whole, language: string) => {
      const output = printed[at++ - 1];
      return language === 'text' ? `\`\`\`text\n${output.trimEnd()}\n\`\`\`` : whole;
    });
    writeFileSync('README.md', renewed);
    expect(at).toBe(blocks.length);
  });

  test('links to files that exist', () => {
    for (const [, path] of readme.matchAll(/`((?:cli|materials)\/[\w/.-]+)`/g)) {
      expect(readFileSync(path).length, path).toBeGreaterThan(0);
    }
  });
});
