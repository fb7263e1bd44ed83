/**
 * The study: every choice that, with the tracks, decides a fit. Options on the command line and the JSON of
 * `--study FILE` both end as one resolved study, which the fit file records.
 */

import { z } from 'zod';

/** SHAPE of a coefficient as the user writes it, e.g. `constant`, `polynomial:3`, `spline`, `spline:8`, `waves:2`. */
const shape = z
  .string()
  .describe(
    'zero, constant, linear, polynomial:N, spline (size from the data), spline:N (N functions per axis), waves:N (periodic axes), or law:FORMULA',
  );

const form = z.enum(['scalar', 'axes', 'matrix']);

export const studySchema = z
  .strictObject({
    order: z.enum(['auto', 'first', 'second']).default('auto').describe('order of the model'),
    estimator: z.enum(['likelihood', 'differences', 'kernel']).default('likelihood').describe('estimator'),
    force: shape.default('spline'),
    friction: shape.default('spline'),
    noise: shape.default('spline'),
    drift: shape.default('spline'),
    diffusion: shape.default('spline'),
    frictionForm: form
      .default('scalar')
      .describe('form of the friction: one number, one per axis, or a full matrix'),
    noiseForm: form
      .default('scalar')
      .describe('form of the noise (second order) or the diffusion (first order)'),
    replicates: z.int().min(20).max(100_000).default(200).describe('bootstrap replicates'),
    bootstrap: z
      .enum(['one-step', 'refit'])
      .default('one-step')
      .describe(
        'replicates from first-order effects of blocks, or from refits of recordings drawn block by block',
      ),
    confidence: z.number().gt(0.5).lt(1).default(0.95).describe('confidence level of every interval'),
    localizationError: z
      .union([z.literal('auto'), z.number().min(0)])
      .default('auto')
      .describe('standard deviation of the localization error per axis (length), or auto: estimated'),
    exposure: z
      .number()
      .min(0)
      .max(1)
      .default(0)
      .describe('fraction of the sampling interval over which a position is averaged (motion blur)'),
    refine: z
      .boolean()
      .default(false)
      .describe('remove what finite sampling leaves by simulating and fitting again (indirect inference)'),
    seed: z.int().min(0).default(1).describe('seed of every random draw'),
    laws: z
      .record(
        z.string(),
        z.strictObject({
          formula: z.string().describe('in x, y, z and named parameters, e.g. g0*(1+a*tanh(x/w))'),
          start: z
            .record(z.string(), z.number())
            .default({})
            .describe('values the search for the parameters begins at'),
          about: z.string().default('').describe('the law in words'),
          source: z.string().default('').describe('where the law comes from'),
          range: z.string().default('').describe('where it is valid'),
        }),
      )
      .default({})
      .describe('laws of your own, by name, for test --law NAME'),
    // how the table is read
    columns: z
      .record(z.string(), z.string())
      .default({})
      .describe('role → column name, e.g. {"track": "ID"}'),
    interval: z
      .number()
      .positive()
      .nullable()
      .default(null)
      .describe('time between frames where the column counts frames'),
    lengthScale: z.number().positive().default(1).describe('factor from table lengths to lengths'),
    timeScale: z.number().positive().default(1).describe('factor from table times to times'),
    units: z
      .strictObject({ length: z.string().nullable(), time: z.string().nullable() })
      .default({ length: null, time: null })
      .describe('labels of the length and time units'),
    period: z
      .array(z.number().min(0))
      .nullable()
      .default(null)
      .describe('period of each axis, 0 = open (after scaling)'),
    mass: z
      .number()
      .positive()
      .nullable()
      .default(null)
      .describe('mass, where forces should be given in mass units'),
    skipInvalid: z
      .boolean()
      .default(false)
      .describe('skip and count non-finite positions instead of refusing them'),
  })
  .describe('wanderlaw study');

export type Study = z.output<typeof studySchema>;
/** A study as written by hand: every field optional. */
export type StudyInput = z.input<typeof studySchema>;
