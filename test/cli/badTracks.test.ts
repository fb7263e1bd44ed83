import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, afterEach, describe, expect, it } from 'vitest';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

/** A table of two tracks that wander enough to be fitted. */
function makeTable(edit: (rows: string[]) => string[] = (rows) => rows): string {
  const rows = ['track,time,x,y'];
  for (const track of [1, 2]) {
    for (let k = 0; k < 40; k++) {
      const x = Math.sin(1.7 * k * track) + 0.1 * k;
      const y = Math.cos(2.3 * k + track);
      rows.push(`${track},${(0.1 * k).toFixed(1)},${x.toFixed(4)},${y.toFixed(4)}`);
    }
  }
  return `${edit(rows).join('\n')}\n`;
}

const replaceRow = (row: number, text: string) =>
  makeTable((rows) => rows.map((line, i) => (i === row ? text : line)));

/** What the tracks are, the table, and words of the sentence. */
const CASES: readonly [title: string, table: string | Uint8Array, ...words: string[]][] = [
  ['an empty file', '', 'bad.csv'],
  ['a header alone', 'track,time,x,y\n', 'bad.csv'],
  ['no column of positions', 'track,time,a,b\n1,0,2,3\n', 'bad.csv', 'x'],
  ['no column of times', 'track,x,y\n1,0,2\n', 'bad.csv', 'time'],
  ['text for a position', replaceRow(5, '1,0.4,abc,2'), 'bad.csv line 6', 'column x', 'abc'],
  ['NaN for a position', replaceRow(5, '1,0.4,NaN,2'), 'bad.csv line 6', 'column x', '--skip-invalid'],
  ['an infinite position', replaceRow(5, '1,0.4,2,inf'), 'bad.csv line 6', 'column y'],
  ['conflicting duplicates', makeTable((rows) => [...rows, '1,0.3,99,99']), 'bad.csv', 'line'],
  ['a ragged row', replaceRow(5, '1,0.4,3'), 'bad.csv line 6'],
  ['an unclosed quote', replaceRow(5, '"1,0.4,3,2'), 'bad.csv line 6', 'quote'],
  ['binary junk', Uint8Array.from({ length: 5000 }, (_, i) => (i * 7919 + (i >> 3)) % 256), 'bad.csv'],
  [
    'a position beside which all others vanish',
    replaceRow(5, '1,0.4,1e308,2'),
    'bad.csv line 6',
    'x is 1e+308',
  ],
  ['a time beside which all others vanish', replaceRow(40, '1,1e20,3,2'), 'bad.csv line 41', 'time is 1'],
  ['one position only', 'time,x\n0,1\n', 'one position only'],
  ['one time only', 'track,time,x,y\n1,0,1,2\n2,0,3,4\n3,0,5,6\n', 'same time 0'],
];

describe('tracks that cannot be used', () => {
  afterEach(() => expect(place.list().filter((name) => name !== 'bad.csv' && name !== 'dir')).toEqual([]));

  for (const [title, table, ...words] of CASES) {
    for (const command of ['survey', 'fit']) {
      it(`${command} ends with 3 and one sentence for ${title}`, async () => {
        place.write('bad.csv', table);
        const { status, stdout, stderr } = await place.run([command, 'bad.csv', '-o', 'out.json']);
        expect(stderr).toMatch(/^(wanderlaw: warning: [^\n]+\n)*wanderlaw: [^\n]+\n$/);
        for (const word of words) expect(stderr).toContain(word);
        expect([status, stdout]).toEqual([3, '']);
      });
    }
  }

  it('tracks too short for the order asked for end with 3', async () => {
    place.write('bad.csv', 'track,time,x\n1,0,0\n1,1,1\n1,2,0\n2,0,0\n2,1,2\n2,2,1\n');
    const { status, stderr } = await place.run(['fit', 'bad.csv', '--order', 'second', '-o', 'out.json']);
    expect(status).toBe(3);
    expect(stderr).toMatch(/3 positions.*second-order.*4/);
  });

  it('tracks too short for the coefficients asked for end with 3', async () => {
    const rows = Array.from({ length: 9 }, (_, i) => {
      const [x, y, z] = [1.7, 2.9, 4.3].map((turn) => Math.sin(turn * (i + 1) ** 2).toFixed(4));
      return `${Math.floor(i / 3)},${i % 3},${x},${y},${z}`;
    });
    place.write('bad.csv', `track,time,x,y,z\n${rows.join('\n')}\n`);
    const { status, stderr } = await place.run(['fit', 'bad.csv', '-o', 'out.json']);
    expect(stderr).toMatch(/wanderlaw: 3 tracks of 9 positions in all cannot carry this fit: [^\n]+\n$/);
    expect(status).toBe(3);
  });

  it('tracks of three positions that carry a fit say how little they say', async () => {
    const rows = Array.from({ length: 15 }, (_, i) => {
      const [x, y] = [1.7, 2.9].map((turn) => Math.sin(turn * (i + 1) ** 2).toFixed(4));
      return `${Math.floor(i / 3)},${i % 3},${x},${y}`;
    });
    place.write('bad.csv', `track,time,x,y\n${rows.join('\n')}\n`);
    const { status, stdout, stderr } = await place.run(['fit', 'bad.csv', '--json']);
    expect(status).toBe(0);
    expect(stderr).toContain('the typical track has 3 positions');
    expect(stderr).toContain('rests on 10 numbers');
    expect(JSON.parse(stdout)).toMatchObject({ model: { order: 'first' } });
  });

  for (const order of ['first', 'second', 'auto']) {
    it(`tracks that never move end with 3 (order ${order})`, async () => {
      const rows = Array.from({ length: 60 }, (_, k) => `${k % 3},${Math.floor(k / 3)},1.5,2.5`);
      place.write('bad.csv', `track,time,x,y\n${rows.join('\n')}\n`);
      const { status, stderr } = await place.run(['fit', 'bad.csv', '--order', order, '-o', 'out.json']);
      expect(stderr).toMatch(/wanderlaw: [^\n]+\n$/);
      expect(stderr).not.toContain('something went wrong');
      expect(status).toBe(3);
    });
  }

  it('a missing file and a directory end with 3', async () => {
    mkdirSync(join(place.path, 'dir'), { recursive: true });
    for (const [name, reason] of [
      ['nowhere.csv', 'there is no such file'],
      ['dir', 'it is a directory'],
    ]) {
      const { status, stderr } = await place.run(['fit', name, '-o', 'out.json']);
      expect(stderr).toBe(
        `wanderlaw: ${name} cannot be read: ${reason}; ${reason.startsWith('it') ? 'name the files in it' : 'check the path'}\n`,
      );
      expect(status).toBe(3);
    }
  });

  it('skips and counts what is not finite where asked to', async () => {
    place.write('bad.csv', replaceRow(5, '1,0.4,NaN,2'));
    const { status, stdout } = await place.run(['survey', 'bad.csv', '--skip-invalid', '--json']);
    expect(status).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({ tracks: 2, positions: 79 });
  });
});

describe('an output that cannot be written', () => {
  it('is refused with 2 before the tracks are read', async () => {
    place.write('bad.csv', makeTable());
    for (const [output, reason] of [
      ['no/fit.json', 'there is no directory'],
      ['dir', 'it is a directory'],
      ['bad.csv/fit.json', 'not a directory'],
      ['bad.csv', 'read as input'],
    ]) {
      const { status, stdout, stderr } = await place.run(['fit', 'bad.csv', '-o', output]);
      expect(stderr).toContain(reason);
      expect(stderr).toMatch(/^wanderlaw: [^\n]+\n$/);
      expect([status, stdout]).toEqual([2, '']);
    }
    expect(place.list()).toEqual(['bad.csv', 'dir']);
  });
});

describe('a place for more files that cannot be used', () => {
  it('is refused with 2 and the option that names it', async () => {
    place.write('bad.csv', makeTable());
    const momenta = await place.run(['survey', 'bad.csv', '--momenta', 'no/momenta.csv']);
    expect([momenta.status, momenta.stdout]).toEqual([2, '']);
    expect(momenta.stderr).toMatch(/^wanderlaw: no\/momenta\.csv [^\n]* with --momenta\n$/);
    const demo = await place.run(['demo', 'settling-beads', '-o', 'bad.csv']);
    expect([demo.status, demo.stdout]).toEqual([2, '']);
    expect(demo.stderr).toMatch(
      /^wanderlaw: bad\.csv cannot be made: there is a file of that name; [^\n]+\n$/,
    );
  });

  it('folders beside the data sets are none', async () => {
    const { status, stderr } = await place.run(['demo', 'pictures']);
    expect(status).toBe(2);
    expect(stderr).toMatch(
      /"pictures" is not a shipped data set[^\n]*\(felt-table, settling-beads, stripe-cells\)\n$/,
    );
  });
});

describe('a document that is not what it should be', () => {
  const documents: readonly [title: string, content: string, ...words: string[]][] = [
    ['no JSON', 'track,time\n', 'does not hold JSON'],
    ['empty', '', 'does not hold JSON'],
    ['another object', '{"a": 1}', 'no format'],
    ['an array', '[1, 2]', 'no JSON object'],
    ['a fit without its parts', '{"format": "wanderlaw-fit", "version": 1}', 'doc.json'],
    ['a fit of the future', '{"format": "wanderlaw-fit", "version": 2}', 'version'],
  ];
  const commands: readonly (readonly string[])[] = [
    ['evaluate', 'doc.json', '--at', 'points.csv'],
    ['resimulate', 'doc.json'],
    ['scenario', 'doc.json'],
    ['report', 'doc.json'],
  ];
  for (const [title, content, ...words] of documents) {
    it(`ends with 2 and one sentence: ${title}`, async () => {
      place.write('doc.json', content);
      place.write('points.csv', 'x,y\n0,0\n');
      for (const command of commands) {
        const { status, stdout, stderr } = await place.run([...command, '-o', 'result']);
        expect(stderr).toMatch(/^wanderlaw: [^\n]+\n$/);
        for (const word of ['doc.json', ...words]) expect(stderr).toContain(word);
        expect([status, stdout]).toEqual([2, '']);
      }
      const simulated = await place.run(['simulate', 'doc.json', '-o', 'result']);
      expect(simulated.status).toBe(2);
      expect(simulated.stderr).toMatch(/^wanderlaw: [^\n]+\n$/);
      expect(place.list()).not.toContain('result');
    });
  }

  it('or is missing ends with 2', async () => {
    const { status, stderr } = await place.run(['scenario', 'nowhere.json']);
    expect([status, stderr]).toEqual([
      2,
      'wanderlaw: fit file nowhere.json cannot be read: there is no such file\n',
    ]);
  });
});
