import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { DataError, UsageError } from '../../src/errors.js';
import { type ImportOptions, importTracks } from '../../src/import/importTracks.js';
import { failure, failureOf, importText, sourceOf } from './sources.js';

interface BadTable {
  readonly content: string | Uint8Array;
  readonly options?: ImportOptions;
  readonly line?: number;
  readonly column?: string;
  /** Words the sentence must hold. */
  readonly says: RegExp;
}

const HEADER = 'track,time,x,y\n';

const BAD_TABLES: Record<string, BadTable> = {
  'an empty file': { content: '', says: /is empty; a header line/ },
  'a file of blank lines and comments': { content: '# nothing\n\n   \n', says: /is empty/ },
  'an empty gzip file': { content: gzipSync(''), says: /is empty/ },
  'a header without rows': { content: `# only this\n${HEADER}\n\n`, line: 2, says: /not a single row/ },
  'a header behind a comment mark': {
    content: '# track,time,x\n1,0,2\n1,1,3\n',
    line: 2,
    says: /begin with # are comments/,
  },
  'no header': { content: '1,0,0.5,2\n1,1,0.7,2\n', line: 1, says: /a header line that names the columns/ },
  'no x': { content: 'track,time,q\n1,0,2\n', line: 1, says: /no column x; .*"track", "time", "q"/ },
  'a name with its unit': { content: 'track,time,x (µm)\n1,0,2\n', line: 1, says: /--columns x="x \(µm\)"/ },
  'no time': {
    content: 'track,tme,x\n1,0,2\n',
    line: 1,
    says: /no column time or frame; .*--columns time=tme/,
  },
  'z without y': { content: 'track,time,x,z\n1,0,2,3\n', line: 1, says: /no column y although there is z/ },
  'y without x': { content: 'track,time,y\n1,0,2\n', line: 1, says: /no column x although there is y/ },
  'a mapped column that is not there': {
    content: 'ID,t,PosX\n1,0,2\n',
    options: { columns: { track: 'ID', time: 't', x: 'Posx1' } },
    line: 1,
    says: /no column "Posx1" for x; did you mean "PosX"\? \(columns: "ID", "t", "PosX"\)/,
  },
  'a mapped column near to one that has its role already': {
    content: 'ID,t,PosX,PosY\n1,0,1,2\n',
    options: { columns: { track: 'ID', time: 't', x: 'PosX', y: 'PosZ' } },
    line: 1,
    says: /no column "PosZ" for y; did you mean "PosY"\?/,
  },
  'a column that is there twice': {
    content: 'track,time,x,X,x\n1,0,2,3,4\n',
    line: 1,
    column: 'x',
    says: /2 columns/,
  },
  'errors for one axis only': {
    content: 'time,x,y,error_x\n1,0,2,1\n',
    line: 1,
    says: /none for y; add error_y/,
  },
  'blanks between the cells': {
    content: 'track time x\n1 0 2\n',
    line: 1,
    says: /separated by commas, semicolons or tabs/,
  },
  'text for a position': {
    content: `${HEADER}1,0,1,2\n1,1,abc,2\n`,
    line: 3,
    column: 'x',
    says: /"abc" is not a number/,
  },
  'text for a time': {
    content: `${HEADER}1,soon,1,2\n`,
    line: 2,
    column: 'time',
    says: /"soon" is not a number/,
  },
  'a number followed by text': { content: `${HEADER}1,0,12abc,2\n`, line: 2, column: 'x', says: /"12abc"/ },
  'a hexadecimal number': {
    content: `${HEADER}1,0,1,0x10\n`,
    line: 2,
    column: 'y',
    says: /"0x10" is not a number/,
  },
  'markup in a number': { content: `${HEADER}1,0,1,<b>2</b>\n`, line: 2, column: 'y', says: /"<b>2<\/b>"/ },
  'a marker for a position that was not found': {
    content: `${HEADER}1,0,1,2\n1,1,2,3\n1,2,1,-1e30\n1,3,2,3\n1,4,1,2\n`,
    line: 4,
    says: /y is -1e\+30, beside which/,
  },
  'a thousands separator': {
    content: `${HEADER}1,0,"1,234.5",2\n`,
    line: 2,
    column: 'x',
    says: /thousands separators/,
  },
  'a thousands separator next to a decimal comma': {
    content: 'time;x\n0;1.234,5\n',
    line: 2,
    column: 'x',
    says: /thousands separators/,
  },
  'a decimal comma between commas': {
    content: `${HEADER}1,0,"1,5",2\n`,
    line: 2,
    column: 'x',
    says: /decimal commas only/,
  },
  'two decimal marks in one file': {
    content: 'time;x\n0;1,5\n1;0\n2;2.5\n',
    line: 4,
    column: 'x',
    says: /"2.5" has a point but line 2 a decimal comma/,
  },
  'a comma in a file with decimal points': {
    content: 'time\tx\n0\t1.5\n1\t1,234\n',
    line: 3,
    column: 'x',
    says: /"1,234" has a comma but line 2 a decimal point/,
  },
  NaN: {
    content: `${HEADER}1,0,NaN,2\n`,
    line: 2,
    column: 'x',
    says: /"NaN" is not a finite number.*--skip-invalid/,
  },
  infinity: { content: `${HEADER}1,0,1,-inf\n`, line: 2, column: 'y', says: /"-inf" is not a finite number/ },
  'a number beyond double precision': {
    content: `${HEADER}1,0,1,1e400\n`,
    line: 2,
    column: 'y',
    says: /"1e400"/,
  },
  'an empty cell': {
    content: `${HEADER}1,0,,2\n`,
    line: 2,
    column: 'x',
    says: /the cell is empty.*--skip-invalid/,
  },
  'an unnamed track': {
    content: `${HEADER},0,1,2\n`,
    line: 2,
    column: 'track',
    says: /the cell is empty; name the track/,
  },
  'conflicting rows': {
    content: `${HEADER}7,0.36,1,2\n8,0.36,1,2\n7,0.5,1,2\n7,0.36,1,3\n`,
    says: /tracks.csv: track "7" has two different positions at time 0.36 \(lines 2 and 5\); keep one/,
  },
  'rows of several tracks without a track column': {
    content: 'particle,time,x\n1,0,1\n1,1,2\n2,0,3\n',
    says: /the file has no track column and two different positions at time 0 \(lines 2 and 4\); .*--columns track=NAME/,
  },
  'a row too short': {
    content: `${HEADER}1,0,1,2\n1,1,1\n`,
    line: 3,
    says: /3 cells but the header 4; fill in/,
  },
  'a row too long': { content: `${HEADER}1,0,1,2,9\n`, line: 2, says: /5 cells but the header 4; remove/ },
  'a quote never closed': { content: `${HEADER}1,0,1,2\n"1,1,1,2\n1,2,1,2\n`, line: 3, says: /never closed/ },
  'a quote closed too early': {
    content: `${HEADER}1,0,1,2\n"a"b,1,1,2\n`,
    line: 3,
    says: /closing quote is followed/,
  },
  'a quote open for a million characters': {
    content: `${HEADER}1,0,1,2\n"1,1,1,2\n${'1,2,1,2\n'.repeat(200_000)}`,
    line: 3,
    says: /not closed within a million characters/,
  },
  'a line of a million characters': {
    content: `${HEADER}${'1,'.repeat(600_000)}`,
    line: 2,
    says: /a text table\?/,
  },
  'a NUL byte': { content: `${HEADER}1,0,1,2\n1,1,\0,2\n`, line: 3, says: /NUL byte/ },
  'UTF-16 without a mark': {
    content: Buffer.from(HEADER, 'utf16le'),
    line: 1,
    says: /UTF-16 without a mark/,
  },
  'half a UTF-16 character': {
    content: Buffer.concat([Buffer.from('\ufefftime,x\n0,1\n', 'utf16le'), Buffer.of(0x31)]),
    line: 3,
    says: /not UTF-16LE text/,
  },
  'bytes that are not UTF-8': {
    content: Buffer.concat([Buffer.from(`${HEADER}1,0,1,2\n`), Buffer.from('µ,1,1,2\n', 'latin1')]),
    line: 3,
    says: /not UTF-8 text; save/,
  },
  'random bytes': {
    content: Uint8Array.from({ length: 5000 }, (_, i) => (i * i * 31 + 7 * i + 129) % 256),
    line: 1,
    says: /UTF-8|NUL/,
  },
  'a spreadsheet workbook': {
    content: Buffer.from('PK\x03\x04\x14\x00rest'),
    says: /spreadsheet workbook; export/,
  },
  'damaged gzip data': {
    content: gzipSync(`${HEADER}${'1,0,1,2\n'.repeat(9)}`).subarray(0, 40),
    says: /gzip data are damaged or cut short/,
  },
  'a single time': { content: `${HEADER}1,5,1,2\n2,5,3,4\n`, says: /all 2 positions are at the same time 5/ },
  'a single row': { content: `${HEADER}1,5,1,2\n`, says: /one position only, at time 5/ },
  'tracks of one position each': { content: `${HEADER}1,5,1,2\n2,6,3,4\n`, says: /none of the 2 tracks/ },
  'frozen tracks': {
    content: `${HEADER}1,0,1,2\n1,1,1,2\n2,0,3,4\n2,1,3,4\n`,
    says: /no position ever changes/,
  },
  'two types in one track': {
    content: 'track,time,x,type\n1,0,1,red\n2,0,1,red\n1,1,2,blue\n',
    line: 4,
    column: 'type',
    says: /track "1" is of type "blue" here but of type "red" on line 2/,
  },
  'a negative error': {
    content: 'time,x,error_x\n0,1,0.1\n1,2,-0.1\n',
    line: 3,
    column: 'error_x',
    says: /"-0.1" is negative/,
  },
  'part of a frame': {
    content: 'frame,x\n0,1\n0.5,2\n',
    line: 3,
    column: 'frame',
    says: /--columns time=frame/,
  },
  'only invalid rows, skipped': {
    content: `${HEADER}1,0,nan,2\n1,1,nan,2\n`,
    options: { skipInvalid: true },
    says: /all 2 rows were skipped/,
  },
  'positions too large once scaled': {
    content: 'time,x\n0,1e300\n1,2e300\n',
    options: { lengthScale: 1e100 },
    says: /use a smaller --length-scale/,
  },
};

describe('bad track tables', () => {
  it.each(Object.keys(BAD_TABLES))('%s is refused in one sentence with its place', async (name) => {
    const { content, options, line, column, says } = BAD_TABLES[name];
    const error = await failureOf(content, options);
    expect(error.message).toMatch(says);
    expect(error).toBeInstanceOf(DataError);
    expect(error.exitStatus).toBe(3);
    expect(error.message).not.toContain('\n');
    expect(error.facts.line).toBe(line);
    expect(error.facts.column).toBe(column);
    if (line !== undefined) expect(error.message.startsWith(`tracks.csv line ${line}`)).toBe(true);
    if (column !== undefined) expect(error.message).toContain(`line ${line}, column ${column}: `);
  });

  it('lines are counted right behind comments, empty lines and quoted line breaks, in chunks of any size', async () => {
    const head = '# one\n\ntrack,time,x\n"a\nb",0,1\n# six\n\n"a\nb",1,2\n';
    for (const ending of ['\n', '\r\n', '\r']) {
      const content = `${head}c,0,oops\n`.replaceAll('\n', ending);
      for (const chunkSize of [1, 2, 3, 5, 1000]) {
        const error = await failure(importTracks([sourceOf(content, 'tracks.csv', chunkSize)]));
        expect(error.facts).toMatchObject({ line: 10, column: 'x', value: 'oops' });
      }
    }
  });

  it('a second file is named in its own errors', async () => {
    const good = sourceOf('time,x\n0,1\n1,2\n', 'good.csv');
    const error = await failure(importTracks([good, sourceOf('time,x\n0,1\n1,oops\n', 'bad.csv')]));
    expect(error.facts).toMatchObject({ file: 'bad.csv', line: 3, column: 'x' });
  });

  it.each([
    [
      'other dimensions',
      'track,time,x\n1,0,1\n',
      'track,time,x,y\n1,0,1,1\n',
      /2 coordinates but 1 in a.csv/,
    ],
    ['frames', 'track,time,x\n1,0,1\n', 'track,frame,x\n1,0,1\n', /times, the other frames/],
    ['types', 'track,time,x,type\n1,0,1,p\n', 'track,time,x\n1,0,1\n', /type column/],
    ['errors', 'track,time,x\n1,0,1\n', 'track,time,x,error_x\n1,0,1,1\n', /error columns/],
  ])('files that differ in %s are refused', async (_, first, second, says) => {
    const error = await failure(importTracks([sourceOf(first, 'a.csv'), sourceOf(second, 'b.csv')]));
    expect(error.exitStatus).toBe(3);
    expect(error.message).toMatch(says);
    expect(error.facts.file).toBe('b.csv');
  });

  it('a failure of the caller to deliver bytes is passed on as it is', async () => {
    const broken = new Error('disk on fire');
    const chunks = (async function* (): AsyncGenerator<Uint8Array> {
      yield new TextEncoder().encode('track,time,x\n');
      throw broken;
    })();
    expect(await failure(importTracks([{ name: 'a.csv', chunks }]))).toBe(broken);
    const packed = (async function* (): AsyncGenerator<Uint8Array> {
      yield gzipSync('track,time,x\n').subarray(0, 12);
      throw broken;
    })();
    expect(await failure(importTracks([{ name: 'a.csv', chunks: packed }]))).toBe(broken);
  });

  it('a source is closed when its table is refused', async () => {
    let closed = false;
    const chunks = (async function* (): AsyncGenerator<Uint8Array> {
      try {
        for (;;) yield new TextEncoder().encode('time,x\n0,oops\n');
      } finally {
        closed = true;
      }
    })();
    await failure(importTracks([{ name: 'a.csv', chunks }]));
    expect(closed).toBe(true);
  });
});

describe('options that make no sense', () => {
  const TABLE = 'track,time,x,y\n1,0,1,2\n1,1,2,3\n';

  it.each<[string, ImportOptions, RegExp]>([
    ['an unknown role', { columns: { trakc: 'ID' } }, /"trakc" is not a role; did you mean track\?/],
    ['a role without a name', { columns: { track: '' } }, /track needs the name of a column/],
    ['time and frame', { columns: { time: 'a', frame: 'b' } }, /both time and frame/],
    ['one column for two roles', { columns: { x: 'x', y: 'x' } }, /column "x" two roles/],
    ['an interval of zero', { interval: 0 }, /--interval is a time and must be above 0, got 0/],
    ['a negative scale', { lengthScale: -1 }, /--length-scale .* got -1/],
    ['an infinite scale', { timeScale: Infinity }, /--time-scale .* got Infinity/],
    ['too few periods', { period: [4] }, /names 1 axis but the tracks have 2 \(x, y\)/],
    ['a negative period', { period: [4, -1] }, /--period "-1" is not a length/],
  ])('%s is a usage error', async (_, options, says) => {
    const error = await failure(importText(TABLE, options));
    expect(error).toBeInstanceOf(UsageError);
    expect(error.exitStatus).toBe(2);
    expect(error.message).toMatch(says);
  });

  it('the same file twice, and no file at all, are usage errors', async () => {
    expect((await failure(importTracks([]))).exitStatus).toBe(2);
    const twice = failure(importTracks([sourceOf(TABLE), sourceOf(TABLE)]));
    expect((await twice).message).toMatch(/tracks.csv is given twice/);
  });
});
