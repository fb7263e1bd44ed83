/**
 * The fit file: the estimated model, its uncertainty, and everything `evaluate` needs without the tracks.
 * Apart from `created` and `timing` it depends on tracks, study and seed alone.
 */

import { z } from 'zod';
import { modelSchema } from './fields.js';
import { studySchema } from './Study.js';

const numbers = z.array(z.number());
const warning = z.strictObject({ code: z.string(), message: z.string() });

export const fitSchema = z.strictObject({
  format: z.literal('wanderlaw-fit'),
  version: z.literal(1),
  program: z.string().describe('program and version that wrote the file'),
  created: z.string().describe('time of writing, ISO 8601'),
  timing: z.record(z.string(), z.number()).describe('seconds per step'),
  study: studySchema,
  sources: z.array(z.strictObject({ path: z.string(), sha256: z.string() })),
  data: z.strictObject({
    tracks: z.int(),
    positions: z.int(),
    dimensions: z.int().min(1).max(3),
    coordinates: z.array(z.string()),
    samplingInterval: z.number().positive(),
    units: z.strictObject({ length: z.string().nullable(), time: z.string().nullable() }),
    mass: z.number().positive().nullable(),
  }),
  model: modelSchema,
  localizationError: z
    .array(z.strictObject({ value: z.number(), low: z.number(), high: z.number() }))
    .describe('per axis, length'),
  uncertainty: z.strictObject({
    method: z.string().describe('how the replicates were made'),
    blocks: z.int().describe('independent blocks (tracks or stretches of tracks) behind the error'),
    confidence: z.number(),
    multiplier: z
      .number()
      .describe('half-width of a pointwise interval in standard deviations of the replicates'),
    simultaneous: z
      .record(z.string(), z.number())
      .describe('half-width of the simultaneous band of each column, in the same unit'),
    replicates: z
      .array(numbers)
      .describe(
        'coefficient vectors drawn from the uncertainty: all fields in model order, component by component',
      ),
  }),
  visited: z.strictObject({
    low: numbers.describe('lower corner of the grid, length'),
    high: numbers.describe('upper corner, length'),
    cells: z.array(z.int().positive()).describe('cells along each axis'),
    counts: z.array(z.int()).describe('positions in each cell, first axis slowest'),
    threshold: z.int().describe('a cell with at least this many positions counts as visited'),
  }),
  trackSample: z
    .array(z.strictObject({ name: z.string(), points: z.array(numbers) }))
    .describe('a few tracks, thinned, for pictures; each point is time followed by the coordinates'),
  survey: z.record(z.string(), z.json()).describe('what `survey` said of the tracks'),
  diagnostics: z.record(z.string(), z.json()).describe('what the estimator has to say about itself'),
  warnings: z.array(warning),
});

export type FitDocument = z.output<typeof fitSchema>;

/** What only the program adds to a fit: what the file is, where the tracks came from, and the clock. */
export type FitOrigin = Pick<
  FitDocument,
  'format' | 'version' | 'program' | 'created' | 'timing' | 'sources'
>;

/** A fit as the library returns it. A fit document is one, too. */
export type FitResult = Omit<FitDocument, keyof FitOrigin>;

/** A fit of either kind, whose origin may be known. */
export type FitOfAnyOrigin = FitResult & Partial<FitOrigin>;
