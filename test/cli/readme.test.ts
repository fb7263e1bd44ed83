/** What README tells people to type, typed as it stands there, in the order of the page. */

import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { Workplace } from './runInProcess.js';

const readme = readFileSync(fileURLToPath(new URL('../../README.md', import.meta.url)), 'utf8');

/** Blocks of code of one language. */
function listBlocks(language: string): string[] {
  return [...readme.matchAll(new RegExp(`^\`\`\`${language}\\n([\\s\\S]*?)^\`\`\``, 'gm'))].map(
    ([, block]) => block,
  );
}

/** Every line in a block of shell, without its comment. */
const typed = listBlocks('sh')
  .flatMap((block) => block.split('\n'))
  .map((line) => line.replace(/\s+#.*$/, ''))
  .filter((line) => line !== '');

/** Lines that begin with `wanderlaw`; the demos have a test of their own, with their pages (test/pages/demo.test.ts). */
const lines = typed.filter((line) => line.startsWith('wanderlaw ') && !line.startsWith('wanderlaw demo'));

/** The words of a line as a shell would hand them over. */
function splitWords(line: string): string[] {
  return (line.match(/"[^"]*"|\S+/g) ?? []).map((word) => word.replace(/^"(.*)"$/, '$1'));
}

const place = new Workplace();
afterAll(() => place.remove());

beforeAll(() => {
  const tracks = simulateSecondOrder({
    tracks: 15,
    frames: 200,
    interval: 0.2,
    dimensions: 1,
    friction: 1,
    stiffness: 0.5,
    localizationError: 0.01,
    seed: 11,
  });
  place.write('tracks.csv', [...formatTrackTable(tracks)].join(''));
  place.write('points.csv', 'x\n-1\n0\n1\n');
  place.write('ring.json', listBlocks('json')[0]);
});

describe('README', () => {
  it('shows no commands but those of the program, of npm, and of a shell that learns to complete', () => {
    const { scripts } = JSON.parse(
      readFileSync(fileURLToPath(new URL('../../package.json', import.meta.url)), 'utf8'),
    ) as {
      scripts: Record<string, string>;
    };
    expect(scripts.start).toBe('node dist/bin/wanderlaw.js demo');
    const others = typed.filter((line) => !line.startsWith('wanderlaw '));
    for (const line of others) {
      const [, script] = /^npm run (\S+)$/.exec(line) ?? [];
      if (script !== undefined) expect(scripts).toHaveProperty(script);
      else expect(['npm ci', 'npm start', 'npm link', 'eval "$(wanderlaw completion bash)"']).toContain(line);
    }
  });

  it('teaches bash to complete', async () => {
    const { status, stdout } = await place.run(['completion', 'bash']);
    expect(status).toBe(0);
    expect(stdout).toContain('complete -F _wanderlaw wanderlaw');
  });

  it.each(lines)('%s', async (line) => {
    const { status, stderr } = await place.run(splitWords(line).slice(1));
    expect(status, stderr).toBe(0);
    for (const note of stderr.split('\n').filter((each) => each !== '')) {
      expect(note).toMatch(/^wanderlaw: \S/);
    }
    const [, output] = / -o (\S+)/.exec(line) ?? [];
    if (output !== undefined) expect(place.list()).toContain(output);
  });

  it('its example of the library runs', () => {
    const [example, ...others] = listBlocks('ts');
    expect(others).toEqual([]);
    const library = new URL('../../src/index.ts', import.meta.url).href;
    place.write('example.ts', example.replace("'wanderlaw'", `'${library}'`));
    place.write('package.json', '{"type": "module"}');
    const printed = execFileSync(
      process.execPath,
      ['--import', import.meta.resolve('tsx'), join(place.path, 'example.ts')],
      { cwd: place.path, encoding: 'utf8' },
    );
    expect(printed).toMatch(/Float64Array\(3\) \[/);
    expect(printed).toMatch(/^3000 \[/m); // positions of the simulated recording, and the warnings
  });
});
