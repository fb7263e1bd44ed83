import { describe, expect, it } from 'vitest';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { importTracks } from '../../src/import/importTracks.js';
import { describeTracks, importText, sourceOf } from './sources.js';

const codes = (result: { warnings: readonly { code: string }[] }): string[] =>
  result.warnings.map(({ code }) => code);

describe('columns', () => {
  it('columns are found by the mapping, in any case where no name fits exactly', async () => {
    const { tracks } = await importText('Id,T,posx,x,POSX\nq,0,9,8,1\nq,1,9,7,2\n', {
      columns: { track: 'ID', time: 't', x: 'POSX' },
    });
    expect(tracks.trackNames).toEqual(['q']);
    expect(Array.from(tracks.positions)).toEqual([1, 2]);
  });

  it('coordinates that are mapped are all the coordinates, and one left out is told', async () => {
    const result = await importText('time,a,b,x,y,z\n0,1,2,3,4,5\n1,2,3,4,5,6\n', {
      columns: { x: 'a', y: 'b' },
    });
    expect(result.tracks.dimensions).toBe(2);
    expect(Array.from(result.tracks.positions)).toEqual([1, 2, 2, 3]);
    expect(result.warnings.find(({ code }) => code === 'coordinates-left-out')?.message).toMatch(
      /not used: z$/,
    );
    const flat = await importText('time,x,y\n0,3,4\n1,4,5\n', { columns: { x: 'x' } });
    expect(Array.from(flat.tracks.positions)).toEqual([3, 4]);
    expect(codes(flat)).toContain('coordinates-left-out');
  });

  it('one to three dimensions, types and errors arrive in their arrays', async () => {
    const { tracks, warnings } = await importText(
      'error_z,z,y,x,error_x,error_y,track,time,type\n.3,3,2,1,.1,.2,a,0,big one\n.6,6,5,4,.4,.5,a,1,big one\n' +
        '0,0,0,0,0,0,b,1,\n',
    );
    expect(tracks).toMatchObject({ dimensions: 3, coordinates: ['x', 'y', 'z'], periods: [0, 0, 0] });
    expect(Array.from(tracks.positions)).toEqual([1, 2, 3, 4, 5, 6, 0, 0, 0]);
    expect(Array.from(tracks.localizationErrors ?? [])).toEqual([0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0, 0, 0]);
    expect(tracks.trackTypes).toEqual(['big one', '']);
    expect(Array.from(tracks.trackOffsets)).toEqual([0, 2, 3]);
    expect(warnings).toEqual([]);
  });

  it('errors of a coordinate that is not read are passed over', async () => {
    const { tracks } = await importText('time,x,error_x,error_y\n0,1,.1,9\n1,2,.1,9\n');
    expect(Array.from(tracks.localizationErrors ?? [])).toEqual([0.1, 0.1]);
  });

  it('a table without track column is one track named after its file', async () => {
    const one = await importText('time,x\n0,1\n1,2\n');
    expect(one.tracks.trackNames).toEqual(['tracks.csv']);
    expect(one.warnings.map(({ message }) => message)).toEqual([
      'tracks.csv has no track column and is read as one track',
    ]);
    const two = await importTracks([
      sourceOf('time,x\n0,1\n1,2\n', 'a.csv'),
      sourceOf('time,x\n0,1\n1,3\n', 'b.csv'),
    ]);
    expect(two.tracks.trackNames).toEqual(['a.csv', 'b.csv']);
    expect(codes(two)).toEqual(['no-track-column']);
  });
});

describe('several files', () => {
  it('keep their track names where those differ', async () => {
    const result = await importTracks([
      sourceOf('track,time,x\n1,0,1\n1,1,2\n', 'a.csv'),
      sourceOf('x;track;time\n5,5;2;0\n6;2;1\n', 'b.csv'),
    ]);
    expect(result.tracks.trackNames).toEqual(['1', '2']);
    expect(Array.from(result.tracks.positions)).toEqual([1, 2, 5.5, 6]);
    expect(result.warnings).toEqual([]);
  });

  it('name every track by its file too where names are shared, and never join tracks', async () => {
    const result = await importTracks([
      sourceOf('track,time,x\n1,0,1\n1,1,2\n', 'a.csv'),
      sourceOf('track,time,x\n2,0,3\n1,0,5\n1,1,6\n', 'b.csv'),
    ]);
    expect(result.tracks.trackNames).toEqual(['a.csv:1', 'b.csv:2', 'b.csv:1']);
    expect(codes(result)).toEqual(['shared-track-names']);
    expect(result.counts.duplicatesDropped).toBe(0);
  });
});

describe('times', () => {
  it('frames become times by the interval, then by the time scale', async () => {
    const { tracks, warnings } = await importText('frame,track,x\n10,a,1\n12,a,2\n13,a,4\n14,a,5\n', {
      interval: 0.5,
      timeScale: 10,
    });
    expect(Array.from(tracks.times)).toEqual([50, 60, 65, 70]);
    expect(tracks.samplingInterval).toBe(5);
    expect(warnings).toEqual([]);
  });

  it('frames without an interval stay frames, with a warning', async () => {
    const result = await importText('frame,track,x\n1,a,1\n2,a,2\n');
    expect(Array.from(result.tracks.times)).toEqual([1, 2]);
    expect(codes(result)).toEqual(['frames-without-interval']);
  });

  it('time is preferred to frame unless frame is mapped', async () => {
    const content = 'track,frame,time,x\na,0,0,1\na,1,0.5,2\n';
    expect((await importText(content)).tracks.samplingInterval).toBe(0.5);
    const options = { columns: { frame: 'frame' }, interval: 2 };
    expect((await importText(content, options)).tracks.samplingInterval).toBe(2);
  });

  it('an interval given for a time column is used only where that column counts frames', async () => {
    const counted = await importText('track,time,x\na,0,1\na,1,2\n', { interval: 0.25 });
    expect([counted.tracks.samplingInterval, ...codes(counted)]).toEqual([0.25, 'time-read-as-frames']);
    const timed = await importText('track,time,x\na,0,1\na,0.5,2\n', { interval: 0.25 });
    expect([timed.tracks.samplingInterval, ...codes(timed)]).toEqual([0.5, 'interval-ignored']);
    const agreed = await importText('track,time,x\na,0,1\na,2,2\n', { interval: 2 });
    expect([agreed.tracks.samplingInterval, ...codes(agreed)]).toEqual([2]);
  });

  it('gaps stay gaps and uneven times stay as they are', async () => {
    const result = await importText('track,time,x\na,0,1\na,1,2\na,2.5,2\na,7,2\na,7.3,1\n');
    expect(Array.from(result.tracks.times)).toEqual([0, 1, 2.5, 7, 7.3]);
    expect(codes(result)).toContain('uneven-times');
  });

  it('rows of a track at times that differ by rounding only are duplicates', async () => {
    const { tracks, counts } = await importText(
      'track,time,x\na,0,1\na,0.1,2\na,0.2,3\na,0.30000000000000004,4\na,0.3,4\n',
    );
    expect(counts).toEqual({ rows: 5, duplicatesDropped: 1, invalidSkipped: 0 });
    expect(tracks.times.length).toBe(4);
    expect(tracks.samplingInterval).toBe(0.1);
  });
});

describe('rows that are not positions', () => {
  it('duplicates of equal content are dropped with a count', async () => {
    const result = await importText('track,time,x\nb,0,1\na,1,2\na,0,1\na,1,2.0\nb,1,3\na,1,+2\n');
    expect(result.counts).toEqual({ rows: 6, duplicatesDropped: 2, invalidSkipped: 0 });
    expect(codes(result)).toEqual(['duplicates-dropped']);
    expect(describeTracks(result.tracks)).toMatchObject({
      a: { positions: [1, 2] },
      b: { positions: [1, 3] },
    });
  });

  it('missing and infinite positions are skipped with a count where that is asked for', async () => {
    const missing = [
      '',
      ' ',
      'NaN',
      'nan',
      '-nan(ind)',
      'inf',
      '-Infinity',
      'NA',
      'n/a',
      '#N/A',
      'null',
      'None',
      '-',
    ];
    const rows = missing.map((cell, i) => `gone${i},0,${cell}\n`).join('');
    const result = await importText(`track,time,x\na,0,1\n${rows}a,1,2\na,,3\n,2,3\n`, { skipInvalid: true });
    expect(result.tracks.trackNames).toEqual(['a']);
    expect(result.counts).toEqual({
      rows: missing.length + 4,
      duplicatesDropped: 0,
      invalidSkipped: missing.length + 2,
    });
    expect(codes(result)).toEqual(['invalid-skipped']);
  });
});

describe('scales and units', () => {
  it('scales apply to positions, errors and times; units are labels', async () => {
    const units = { length: 'µm', time: 's' };
    const { tracks } = await importText('track,time,x,error_x\na,0,1,0.5\na,3,2,0.25\n', {
      lengthScale: 2,
      timeScale: 10,
      units,
    });
    expect(Array.from(tracks.positions)).toEqual([2, 4]);
    expect(Array.from(tracks.localizationErrors ?? [])).toEqual([1, 0.5]);
    expect(Array.from(tracks.times)).toEqual([0, 30]);
    expect(tracks.samplingInterval).toBe(30);
    expect(tracks.units).toEqual(units);
  });

  it('the period is in lengths after scaling', async () => {
    const { tracks } = await importText('time,x,y\n0,4.5,4.5\n1,0.5,0.5\n', {
      lengthScale: 2,
      period: [10, 0],
    });
    expect(Array.from(tracks.positions)).toEqual([9, 9, 11, 1]);
    expect(tracks.periods).toEqual([10, 0]);
  });
});

describe('the table written', () => {
  it('holds the columns of the input and comes in chunks of whole lines', async () => {
    const table = 'track,time,x,type,error_x\n"a,b",0,-0,big,0.1\n"a,b",0.1,1e-7,big,0.2\n';
    const { tracks } = await importText(table);
    expect([...formatTrackTable(tracks)].join('')).toBe(table);
    const long = 'track,time,x\n' + Array.from({ length: 10_000 }, (_, i) => `1,${i},${i / 3}\n`).join('');
    const chunks = [...formatTrackTable((await importText(long)).tracks)];
    expect(chunks.length).toBe(3);
    expect(chunks.every((chunk) => chunk.endsWith('\n'))).toBe(true);
    expect(chunks.join('')).toBe(long);
  });
});
