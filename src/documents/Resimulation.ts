/** The resimulation file: what `resimulate --json` writes and `report --resimulation` reads. */

import { z } from 'zod';
import { checkDocument, type DocumentPlace } from './checkDocument.js';

const maybeNumbers = z.array(z.number().nullable());

export const resimulationSchema = z.strictObject({
  format: z.literal('wanderlaw-resimulation'),
  version: z.literal(1),
  program: z.string(),
  replicates: z.int(),
  seed: z.int(),
  statistics: z.array(
    z.strictObject({
      name: z.string(),
      title: z.string(),
      recorded: z.number(),
      low: z.number(),
      high: z.number(),
      p: z.number(),
      adjusted: z.number(),
    }),
  ),
  times: z
    .array(
      z.strictObject({
        name: z.string(),
        recorded: z.number().nullable(),
        events: z.int(),
        low: z.number().nullable(),
        median: z.number().nullable(),
        high: z.number().nullable(),
      }),
    )
    .default([]),
  refit: z.array(
    z.strictObject({
      name: z.string(),
      putIn: z.number(),
      refitted: z.number(),
      standardError: z.number().nullable(),
    }),
  ),
  p: z.number(),
  level: z.number(),
  consistent: z.boolean(),
  series: z.array(
    z.strictObject({
      kind: z.enum([
        'occupancy',
        'speed',
        'displacement',
        'mean-squared-displacement',
        'velocity-autocorrelation',
        'kinetic-temperature',
        'residence-time',
        'first-passage-time',
      ]),
      name: z.string(),
      title: z.string(),
      axis: z.int().nullable(),
      xLabel: z.string(),
      yLabel: z.string(),
      x: z.array(z.number()),
      recorded: maybeNumbers,
      low: maybeNumbers,
      median: maybeNumbers,
      high: maybeNumbers,
    }),
  ),
  warnings: z.array(z.strictObject({ code: z.string(), message: z.string() })),
});

export type ResimulationDocument = z.output<typeof resimulationSchema>;

/** @throws UsageError  where the value is not what `resimulate --json` writes */
export function parseResimulation(value: unknown, place: Omit<DocumentPlace, 'kind'>): ResimulationDocument {
  return checkDocument(resimulationSchema, value, 'wanderlaw-resimulation', {
    ...place,
    kind: 'resimulation file',
  });
}
