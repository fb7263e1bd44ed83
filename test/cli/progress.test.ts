/** Progress: on terminals alone, of work that takes more than two seconds, with the time left. */

import { Writable } from 'node:stream';
import cliProgress from 'cli-progress';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createProgress, describeTimeLeft } from '../../src/cli/progress.js';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { type Setting, Workplace } from './runInProcess.js';

/** Colours and other renditions; moving the cursor and clearing a line are something else. */
// biome-ignore lint/suspicious/noControlCharactersInRegex: that is what is looked for
const RENDITION = /\u001b\[[\d;]*m/;

/** Progress on a screen that keeps what is written to it, under a clock that is set by hand. */
function watch() {
  let text = '';
  let time = 0;
  const stream = Object.assign(
    new Writable({
      decodeStrings: false,
      write(chunk: string, _encoding, done) {
        text += chunk;
        done();
      },
    }),
    { isTTY: true },
  );
  const progress = createProgress(cliProgress, { stream, title: 'working', width: 100, now: () => time });
  return {
    at(seconds: number, done: number, total: number, stage?: string): string {
      time = 1000 * seconds;
      progress.update(done, total, stage);
      return text;
    },
    stop(): string {
      progress.stop();
      return text;
    },
  };
}

describe('a progress bar', () => {
  it('shows nothing of work that ends within two seconds', () => {
    const { at, stop } = watch();
    at(0.4, 1, 10);
    at(0.6, 4, 10);
    at(1.5, 9, 10);
    expect(stop()).toBe('');
  });

  it('appears as soon as the work is seen to take longer', () => {
    const { at, stop } = watch();
    expect(at(0.6, 1, 10)).toContain('working'); // 6 s in all
    expect(stop()).toContain('10 %');
  });

  it('appears after two seconds where nothing is known of the rest', () => {
    const { at, stop } = watch();
    expect(at(1.9, 0, 10)).toBe('');
    expect(at(2.1, 0, 10)).toContain('working');
    stop();
  });

  it('says stage and time left, without colours, and is cleared in the end', () => {
    const { at, stop } = watch();
    at(10, 25, 100, 'counting');
    const text = stop();
    expect(text).toContain('counting');
    expect(text).toContain('25 %, about 30 s left');
    expect(text).not.toMatch(RENDITION);
    expect(text).toMatch(/\u001b\[2K$|\u001b\[0K$/); // the line is emptied last
    expect(text).not.toContain('\u001b[?25l'); // the cursor stays as it is, whatever interrupts
  });

  it('counts the time of new work anew', () => {
    const { at, stop } = watch();
    at(10, 9, 10, 'first');
    at(20, 0, 10, 'second');
    at(30, 5, 10, 'second');
    expect(stop()).toContain('50 %, about 10 s left');
  });

  it.each([
    [10, 0.01, ''],
    [10, 0.5, ', about 10 s left'],
    [100, 0.25, ', about 5 min left'],
    [3600, 0.25, ', about 3 h left'],
    [10, 0.999, ', nearly done'],
  ])('after %s s and a share of %s says "%s"', (seconds, share, text) => {
    expect(describeTimeLeft(seconds, share)).toBe(text);
  });
});

describe('a command', () => {
  const place = new Workplace();
  afterAll(() => place.remove());
  const FIT =
    'fit tracks.csv --force linear --friction constant --noise constant --replicates 20 -o fit.json';

  beforeAll(async () => {
    const setting = { tracks: 25, frames: 120, interval: 0.2, dimensions: 1, friction: 1, stiffness: 0.5 };
    const tracks = simulateSecondOrder({ ...setting, localizationError: 0.01, seed: 3 });
    place.write('tracks.csv', [...formatTrackTable(tracks)].join(''));
    expect((await place.run([...FIT.split(' '), '--quiet'])).stderr).toBe('');
    expect((await place.run('scenario fit.json -o scenario.json --quiet'.split(' '))).stderr).toBe('');
  });

  /** A clock that is three seconds further whenever it is looked at. */
  const slow = (): Setting => {
    let seconds = 0;
    return { isTTY: true, now: () => (seconds += 3) * 1000 };
  };

  it.each([
    [FIT, 'surveying'],
    [`${FIT} --refine --workers 1`, 'refining'],
    ['test fit.json --hypothesis uniform-friction', 'testing'],
    ['challenge fit.json', 'challenging'],
    ['resimulate fit.json --replicates 19 --no-refit --workers 1', 'simulating'],
    ['scenario fit.json -o scenario.json', 'standing'],
    ['simulate scenario.json -o out.csv --workers 1', 'simulating'],
    ['survey tracks.csv', 'reading'],
  ])('%s tells how far it is', async (line, stage) => {
    const shown = await place.run(line.split(' '), slow());
    expect(shown.status, shown.stderr).toBe(0);
    expect(shown.stderr).toContain(`${stage} `);
    expect(shown.stderr).toMatch(/[█░] \d+ %/);
  });

  it('says nothing of it with --quiet, to a pipe or a file, and to a terminal that cannot clear a line', async () => {
    const quiet = await place.run([...FIT.split(' '), '--quiet'], slow());
    expect([quiet.status, quiet.stderr]).toEqual([0, '']);
    const piped = await place.run(FIT.split(' '), { ...slow(), isTTY: false });
    expect(piped.stderr).toBe('wanderlaw: wrote fit.json\n');
    const dumb = await place.run(FIT.split(' '), { ...slow(), env: { TERM: 'dumb' } });
    expect(dumb.stderr).toBe('wanderlaw: wrote fit.json\n');
  });
});
