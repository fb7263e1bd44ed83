/** The pages of the library's names can be made, and nothing in them is found wanting. */

import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { expect, test } from 'vitest';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));

test('npm run docs finds no fault in the docstrings', () => {
  const manifest = JSON.parse(readFileSync(`${ROOT}/package.json`, 'utf8')) as {
    scripts: Record<string, string>;
    typedocOptions: Record<string, unknown>;
  };
  expect(manifest.scripts.docs).toBe('typedoc');
  expect(manifest.typedocOptions.treatWarningsAsErrors).toBe(true); // a warning ends it with a status that throws here
  const run = () =>
    execFileSync(process.execPath, [`${ROOT}/node_modules/typedoc/bin/typedoc`, '--emit', 'none'], {
      cwd: ROOT,
      encoding: 'utf8',
      stdio: 'pipe',
    });
  expect(run()).toBe('');
});
