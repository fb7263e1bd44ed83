/** Columns whose names are slips: told of, never taken. */

import { describe, expect, it } from 'vitest';
import { importText } from './sources.js';

const ROWS = '1,0,0,0.1\n1,1,0.5,0.1\n1,2,0.7,0.1\n';
const warningsOf = async (header: string): Promise<string[]> =>
  (await importText(`${header}\n${ROWS}`)).warnings
    .filter(({ code }) => code === 'column-not-used')
    .map(({ message }) => message);

describe('a column whose name is close to that of a role', () => {
  it.each([
    ['trak,time,x,q', 'column "trak" is not used; if it is what track means, say --columns track=trak'],
    [
      'Track ID,time,x,q',
      'column "Track ID" is not used; if it is what track means, say --columns track="Track ID"',
    ],
    [
      'track,time,x,eror_x',
      'column "eror_x" is not used; if it is what error_x means, say --columns error_x=eror_x',
    ],
    ['track,time,x,tpye', 'column "tpye" is not used; if it is what type means, say --columns type=tpye'],
  ])('is named in a warning: %s', async (header, message) => {
    expect(await warningsOf(header)).toEqual([message]);
  });

  it.each([
    'track,time,x,type',
    'track,time,x,brightness',
    'track,time,x,error_x',
    'track,frame,x,time of day',
  ])('is not seen in %s', async (header) => {
    expect(await warningsOf(header)).toEqual([]);
  });

  it('is offered where without it positions contradict each other', async () => {
    await expect(importText('trak,time,x\n1,0,0\n1,1,1\n2,0,5\n2,1,6\n')).rejects.toThrow(
      'name the column that tells tracks apart with --columns track=trak',
    );
  });
});
