import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { importTracks } from '../../src/import/importTracks.js';
import { describeTracks, importText, sourceOf } from './sources.js';

const PLAIN = 'track,time,x,y\na,0,1.5,-2\na,1,2.5,-3\nb,0,0,1e-5\nb,2,1.5E3,3\n';

const EXPECTED = {
  a: { times: [0, 1], positions: [1.5, -2, 2.5, -3], errors: null, type: null },
  b: { times: [0, 2], positions: [0, 1e-5, 1500, 3], errors: null, type: null },
};

async function read(content: string | Uint8Array): Promise<unknown> {
  return describeTracks((await importText(content)).tracks);
}

/** Text in UTF-16 with its byte-order mark. */
function encodeUtf16(text: string, bigEndian: boolean): Uint8Array {
  const bytes = Buffer.from(`\ufeff${text}`, 'utf16le');
  return bigEndian ? bytes.swap16() : bytes;
}

describe('dialects of a track table', () => {
  const dialects: Record<string, string | Uint8Array> = {
    commas: PLAIN,
    tabs: PLAIN.replaceAll(',', '\t'),
    semicolons: PLAIN.replaceAll(',', ';'),
    bars: PLAIN.replaceAll(',', '|'),
    'semicolons and decimal commas': PLAIN.replaceAll(',', ';').replaceAll('.', ','),
    'tabs and decimal commas': PLAIN.replaceAll(',', '\t').replaceAll('.', ','),
    CRLF: PLAIN.replaceAll('\n', '\r\n'),
    'lone CR': PLAIN.replaceAll('\n', '\r'),
    'mixed line endings': PLAIN.replace('\n', '\r\n').replace('b,0', '\rb,0'),
    'no line break at the end': PLAIN.trimEnd(),
    'a UTF-8 byte-order mark': `\ufeff${PLAIN}`,
    'UTF-16, little-endian': encodeUtf16(PLAIN, false),
    'UTF-16, big-endian': encodeUtf16(PLAIN, true),
    gzip: gzipSync(PLAIN),
    'gzip in two members': Buffer.concat([gzipSync(PLAIN.slice(0, 30)), gzipSync(PLAIN.slice(30))]),
    'gzip of UTF-16': gzipSync(encodeUtf16(PLAIN, false)),
    'every cell in quotes': PLAIN.replace(/[^,\n]+/g, '"$&"'),
    'every cell in quotes, CRLF': PLAIN.replace(/[^,\n]+/g, '"$&"').replaceAll('\n', '\r\n'),
    'comment lines': `# recorded by hand\n#,",\n${PLAIN.replace('b,0', '# "a,\nb,0')}# the end`,
    'comment lines and quotes': `# it's 5" wide,"\n${PLAIN.replace('b,0', '#,"\n"b",0')}`,
    'empty lines': `\n\n${PLAIN.replaceAll('\n', '\n\n  \n')}`,
    'empty rows of a spreadsheet': `${PLAIN},,,\n,,,\n`,
    'blanks around numbers and names of columns': PLAIN.replaceAll(',', ' , ').replaceAll(/(?<=[ab]) /g, ''),
    'plus signs': PLAIN.replaceAll(/,(?=\d)/g, ',+'),
    'capital names': PLAIN.replace('track,time,x,y', 'TRACK,Time,X,Y'),
    'columns in another order, and more of them': PLAIN.replaceAll(
      /^(\w+),(\w+),(.+),(.+)$/gm,
      '$4,note,$3,$2,$1',
    ),
  };

  it.each(Object.keys(dialects))('a table with %s is read', async (name) => {
    expect(await read(dialects[name])).toEqual(EXPECTED);
  });

  it.each(Object.keys(dialects))('a table with %s is read byte by byte', async (name) => {
    const { tracks } = await importTracks([sourceOf(dialects[name], 'tracks.csv', 1)]);
    expect(describeTracks(tracks)).toEqual(EXPECTED);
  });

  it('names of any content are kept', async () => {
    const names = [
      'two\nlines',
      'two\r\nlines',
      'a "quoted" name',
      'a,b;c\td|e',
      '# no comment',
      '<b>&amp;</b>',
      '🐛'.repeat(500),
      'ünïcode ',
      ' 7',
    ];
    const rows = names.flatMap((name) =>
      [0, 1].map((time) => `"${name.replaceAll('"', '""')}",${time},${time}`),
    );
    for (const ending of ['\n', '\r\n']) {
      const content = ['track,time,x', ...rows].join(ending);
      for (const chunkSize of [1, 7, 1 << 16]) {
        const { tracks } = await importTracks([sourceOf(content, 'tracks.csv', chunkSize)]);
        expect(tracks.trackNames).toEqual(names);
      }
    }
  });

  it('a character cut in two by a chunk is read whole', async () => {
    const { tracks } = await importTracks([sourceOf('track,time,x\nµ🐛,0,1\nµ🐛,1,2\n', 'tracks.csv', 14)]);
    expect(tracks.trackNames).toEqual(['µ🐛']);
  });

  it('a header with commas in its names does not hide the tabs', async () => {
    const { tracks } = await importText('track, no\tt, s\tx, µm\n1\t0\t1,5\n1\t1\t2,5\n', {
      columns: { track: 'track, no', time: 't, s', x: 'x, µm' },
    });
    expect(Array.from(tracks.positions)).toEqual([1.5, 2.5]);
  });

  it('a table of many pieces is read whole', async () => {
    const count = 60_000;
    const rows = Array.from({ length: count }, (_, i) => `track number ${i % 100},${i},${i / 8}\n`);
    const content = gzipSync(`track,time,x\n${rows.join('')}`);
    const { tracks, counts } = await importText(content);
    expect(counts.rows).toBe(count);
    expect(tracks.trackNames.length).toBe(100);
    expect(tracks.positions.reduce((sum, x) => sum + x, 0)).toBe((count * (count - 1)) / 16);
  });
});
