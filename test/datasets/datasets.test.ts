/** The shipped data sets are what their descriptions and their generator say. */

import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { create, all } from 'mathjs';
import { describe, expect, test } from 'vitest';
import { z } from 'zod';
import type { DataSet } from '../../datasets/DataSet.js';
import { DATA_SETS, describeDataSet, formatTable } from '../../datasets/generate.js';
import { DATA_SET_NAMES, TRUTHS } from '../../datasets/truth.js';
import { studySchema } from '../../src/documents/Study.js';

const math = create(all);

const descriptorSchema = z.looseObject({
  name: z.string(),
  title: z.string().min(1),
  description: z.string().min(1),
  question: z.string().endsWith('?'),
  licenses: z.tuple([z.looseObject({ name: z.literal('CC0-1.0') })]),
  resources: z.tuple([
    z.looseObject({
      path: z.literal('tracks.csv'),
      bytes: z.int(),
      hash: z.string().startsWith('sha256:'),
      rows: z.int(),
      dialect: z.looseObject({ delimiter: z.string(), commentChar: z.string().optional() }),
      schema: z.looseObject({
        fields: z.array(z.looseObject({ name: z.string(), description: z.string() })),
      }),
    }),
  ]),
  generation: z.looseObject({ method: z.string(), seed: z.int(), tracks: z.int() }),
  wanderlaw: z.strictObject({ study: studySchema }),
  truth: z.looseObject({
    parameters: z.record(z.string(), z.number()),
    coefficients: z.record(z.string(), z.strictObject({ form: z.string(), formulas: z.array(z.string()) })),
  }),
});

function readDataSetFile(set: DataSet, file: string): string {
  return readFileSync(new URL(`../../datasets/${set.name}/${file}`, import.meta.url), 'utf8');
}

test('every name has its data set and its truth', () => {
  expect(DATA_SETS.map((set) => set.name)).toEqual([...DATA_SET_NAMES]);
  for (const set of DATA_SETS) expect(set.truth).toBe(TRUTHS[set.name]);
});

describe.each(DATA_SETS)('$name', (set) => {
  const table = readDataSetFile(set, 'tracks.csv');
  const written: unknown = JSON.parse(readDataSetFile(set, 'datapackage.json'));
  const lines = table.trimEnd().split('\n');
  const header = lines.findIndex((line) => !line.startsWith('#'));
  const rows = lines.slice(header + 1).map((line) => line.split(set.delimiter));

  test('the description has all its parts, and the table has the hash, size, rows and columns it names', () => {
    const descriptor = descriptorSchema.parse(written);
    const [resource] = descriptor.resources;
    expect(descriptor.name).toBe(set.name);
    expect(`sha256:${createHash('sha256').update(table).digest('hex')}`).toBe(resource.hash);
    expect(Buffer.byteLength(table)).toBe(resource.bytes);
    expect(rows.length).toBe(resource.rows);
    expect(lines[header].split(resource.dialect.delimiter)).toEqual(
      resource.schema.fields.map((field) => field.name),
    );
    expect(rows.every((row) => row.length === resource.schema.fields.length)).toBe(true);
    expect(new Set(rows.map((row) => row[0])).size).toBe(descriptor.generation.tracks);
  });

  test('the committed description is the one the generator writes', () => {
    expect(written).toEqual(JSON.parse(JSON.stringify(describeDataSet(set, table))));
  });

  test('the generator makes the first and the last track again, digit by digit', () => {
    for (const track of [1, set.trackCount]) {
      const again = formatTable(set, set.simulateTrack(track)).trimEnd().split('\n');
      expect(again.slice(header + 1)).toEqual(
        rows.filter((row) => row[0] === String(track)).map((row) => row.join(set.delimiter)),
      );
    }
  });

  test('the formulas of the description give the values of the true functions', () => {
    const { truth } = set;
    const scale = set.name === 'settling-beads' ? 1e-6 : set.name === 'stripe-cells' ? 20 : 0.2;
    for (const [x, y] of [
      [0.3, 0.7],
      [1, -0.4],
      [2.5, 1.9],
    ]) {
      const place = [x * scale, y * scale];
      const evaluate = (name: string): number[] =>
        truth.coefficients[name].formulas.map((formula) => {
          const value: unknown = math.evaluate(formula, { ...truth.parameters, x: place[0], y: place[1] });
          return z.number().parse(value);
        });
      const expected: Record<string, number[]> =
        truth.order === 'second'
          ? { force: truth.force(place), friction: [truth.friction(place)], noise: [truth.noise(place)] }
          : { drift: truth.drift(place), diffusion: [truth.diffusion(place)] };
      expect(Object.keys(truth.coefficients)).toEqual(Object.keys(expected));
      for (const [name, values] of Object.entries(expected)) {
        evaluate(name).forEach((value, i) => {
          const roundoff = 1e-12 * Math.max(Math.abs(values[i]), Number.MIN_VALUE);
          expect(Math.abs(value - values[i])).toBeLessThanOrEqual(roundoff);
        });
      }
    }
  });
});
