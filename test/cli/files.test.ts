import { existsSync, mkdirSync, readFileSync, readlinkSync, symlinkSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import { checkOutput, writeWhole } from '../../src/cli/files.js';
import { removeUnfinishedFiles } from '../../src/cli/unfinishedFiles.js';
import { UsageError } from '../../src/errors.js';
import { Workplace } from './runInProcess.js';

let place = new Workplace();
beforeEach(() => {
  place.remove();
  place = new Workplace();
});
afterAll(() => place.remove());

describe('writing a file', () => {
  it('puts the pieces together and leaves nothing else behind', async () => {
    await writeWhole(join(place.path, 'a.txt'), ['one ', 'two']);
    expect(readFileSync(join(place.path, 'a.txt'), 'utf8')).toBe('one two');
    expect(place.list()).toEqual(['a.txt']);
  });

  it('keeps the older file where the content fails half-way', async () => {
    place.write('a.txt', 'old');
    const content = function* (): Generator<string> {
      yield 'new';
      throw new Error('stop');
    };
    await expect(writeWhole(join(place.path, 'a.txt'), content())).rejects.toThrow('stop');
    expect(readFileSync(join(place.path, 'a.txt'), 'utf8')).toBe('old');
    expect(place.list()).toEqual(['a.txt']);
  });

  it('leaves nothing half-written where a signal comes in between', async () => {
    const content = async function* (): AsyncGenerator<string> {
      yield 'half';
      await new Promise((done) => setTimeout(done, 20));
      expect(place.list()).toHaveLength(1);
      removeUnfinishedFiles();
      expect(place.list()).toEqual([]);
      throw new Error('signal');
    };
    await expect(writeWhole(join(place.path, 'a.txt'), content())).rejects.toThrow('signal');
    expect(place.list()).toEqual([]);
  });

  it('follows a link instead of replacing it', async () => {
    place.write('real.txt', 'old');
    symlinkSync('real.txt', join(place.path, 'link.txt'));
    await writeWhole(join(place.path, 'link.txt'), 'new');
    expect(readlinkSync(join(place.path, 'link.txt'))).toBe('real.txt');
    expect(readFileSync(join(place.path, 'real.txt'), 'utf8')).toBe('new');
  });

  it('to a full device is told in a sentence', async () => {
    if (!existsSync('/dev/full')) return;
    await expect(writeWhole('/dev/full', 'text')).rejects.toThrow(
      /\/dev\/full cannot be written: there is no space left/,
    );
  });
});

describe('an output place', () => {
  const refusals: readonly [string, () => string, RegExp][] = [
    ['in a directory that is not there', () => join(place.path, 'no', 'a.txt'), /there is no directory/],
    ['that is a directory', () => place.path, /it is a directory/],
    ['below a file', () => join(place.path, place.write('f', ''), 'a.txt'), /not a directory/],
  ];
  for (const [title, path, reason] of refusals) {
    it(`${title} is refused before any work`, () => {
      const target = path();
      expect(() => checkOutput(target, 'a.txt')).toThrow(UsageError);
      expect(() => checkOutput(target, 'a.txt')).toThrow(reason);
    });
  }

  it('that is one of the inputs is refused, under any name', () => {
    const input = join(place.path, place.write('tracks.csv', ''));
    mkdirSync(join(place.path, 'sub'));
    symlinkSync('../tracks.csv', join(place.path, 'sub', 'link.csv'));
    expect(() => checkOutput(input, 'tracks.csv', [input])).toThrow(/read as input/);
    expect(() => checkOutput(join(place.path, 'sub', 'link.csv'), 'link.csv', [input])).toThrow(
      /read as input/,
    );
    expect(() => checkOutput(join(place.path, 'other.csv'), 'other.csv', [input])).not.toThrow();
  });
});
