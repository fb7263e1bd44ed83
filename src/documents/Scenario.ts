/**
 * The scenario file: a calibrated model that someone else can read, change and run.
 * A person can write one by hand: coefficients may be fitted bases or formulas of place with named parameters.
 */

import { z } from 'zod';
import { fieldSchema } from './fields.js';

const numbers = z.array(z.number());

const form = z
  .enum(['vector', 'scalar', 'axes', 'matrix'])
  .describe(
    'components that follow: vector (force, drift) one per axis; scalar one for all axes; axes one per axis; matrix row by row, all of them for friction, xx, xy, …, yy, … (upper triangle) for noise and diffusion',
  );
const formulaField = z
  .strictObject({
    form,
    formulas: z
      .array(z.string())
      .describe(
        'one formula per component, of x, y, z and the named parameters: numbers, + - * / ^, parentheses, elementary functions',
      ),
  })
  .describe('a coefficient written as formulas');
const constantField = z
  .strictObject({
    form,
    values: numbers.describe('one number per component'),
  })
  .describe('a coefficient that is the same everywhere');
const coefficient = z.union([fieldSchema, formulaField, constantField]);

/** Standing conditions of a unique stationary law: see `assessStanding`. */
export const standingSchema = z.strictObject({
  conditions: z
    .array(
      z.strictObject({
        name: z.string().describe('stable name of the condition'),
        title: z.string().describe('what is asked, in words'),
        verdict: z.enum(['holds', 'fails', 'unknown']).describe('unknown: cannot be told'),
        value: z.number().nullable().describe('the number the verdict rests on, or null'),
        place: numbers.nullable().describe('where that number is met, length, or null'),
        note: z.string().describe('one sentence: number, unit, place and reason'),
      }),
    )
    .describe('sufficient conditions for one stationary law, approached exponentially fast'),
  relaxation: z
    .strictObject({
      time: z
        .number()
        .nullable()
        .describe('slowest relaxation time of the whole process, time; null: not resolved'),
      low: z.number().describe('lower end of its interval, time'),
      high: z.number().nullable().describe('upper end of its interval, time; null: not bounded'),
      samples: z
        .strictObject({
          value: z.number().describe('best value'),
          low: z.number().describe('lower end of its interval'),
          high: z.number().describe('upper end of its interval'),
        })
        .nullable()
        .describe('effective number of independent samples in a recording of the observation’s size'),
      confidence: z.number().describe('level of the intervals'),
      note: z.string().describe('how it was measured, in one sentence'),
    })
    .nullable()
    .describe('how fast the law is approached; null where the conditions do not all hold'),
});

export const scenarioSchema = z.strictObject({
  format: z.literal('wanderlaw-scenario').describe('says what the file is'),
  version: z.literal(1).describe('version of the format'),
  title: z.string().default('').describe('one line for people'),
  dimensions: z.int().min(1).max(3).describe('number of coordinates: x; x and y; x, y and z'),
  units: z
    .strictObject({
      length: z.string().nullable().describe('label of the length unit, or null'),
      time: z.string().nullable().describe('label of the time unit, or null'),
    })
    .default({ length: null, time: null })
    .describe('labels only: every number of the file is in these units'),
  mass: z
    .number()
    .positive()
    .nullable()
    .default(null)
    .describe(
      'mass of a particle, for reports in mass units; force, friction and noise are always per unit mass',
    ),
  order: z
    .enum(['first', 'second'])
    .describe('second: velocities are remembered between frames; first: they are not'),
  reading: z
    .enum(['ito', 'stratonovich', 'isothermal'])
    .default('ito')
    .describe('stochastic reading of the drift at first order; without meaning at second order'),
  axes: z
    .array(
      z.strictObject({
        kind: z
          .enum(['open', 'periodic', 'walls'])
          .describe('without end; closing on itself; or with reflecting walls'),
        low: z.number().nullable().default(null).describe('lower edge (periodic, walls)'),
        high: z.number().nullable().default(null).describe('upper edge (periodic, walls)'),
      }),
    )
    .describe('the domain, axis by axis'),
  parameters: z.record(z.string(), z.number()).default({}).describe('named numbers the formulas may use'),
  coefficients: z
    .strictObject({
      force: coefficient.optional().describe('force per mass, length/time² (second order)'),
      friction: coefficient.optional().describe('friction, 1/time (second order)'),
      noise: coefficient
        .optional()
        .describe('noise σσᵀ, the growth of the velocity variance, length²/time³ (second order)'),
      drift: coefficient.optional().describe('drift in the reading given, length/time (first order)'),
      diffusion: coefficient.optional().describe('diffusion, length²/time (first order)'),
    })
    .describe('force, friction and noise at second order; drift and diffusion at first'),
  continuation: z
    .strictObject({
      kind: z
        .enum(['hold', 'fade', 'confine'])
        .describe(
          'outside the visited box: hold the edge value; fade to a constant within `width`; confine: hold, with a restoring force of strength `stiffness`',
        ),
      width: z
        .number()
        .positive()
        .nullable()
        .default(null)
        .describe('length over which coefficients fade (fade)'),
      towards: z
        .strictObject({
          force: numbers.optional().describe('components as in coefficients.force'),
          friction: numbers.optional().describe('components as in coefficients.friction'),
          noise: numbers.optional().describe('components as in coefficients.noise'),
          drift: numbers.optional().describe('components as in coefficients.drift'),
          diffusion: numbers.optional().describe('components as in coefficients.diffusion'),
        })
        .default({})
        .describe(
          'constants that coefficients fade to (fade); what is left out fades to its mean over the box',
        ),
      stiffness: z
        .number()
        .positive()
        .nullable()
        .default(null)
        .describe(
          'restoring force per mass and length beyond the edge, 1/time² (second order), or drift per length, 1/time (first order): needed to confine, possible with fade',
        ),
    })
    .default({ kind: 'hold', width: null, towards: {}, stiffness: null })
    .describe('what the coefficients are outside the visited box'),
  visited: z
    .strictObject({
      low: numbers.describe('lower corner, length'),
      high: numbers.describe('upper corner, length'),
    })
    .nullable()
    .default(null)
    .describe('box in which the coefficients are supported by data; null: everywhere'),
  start: z
    .strictObject({
      kind: z.enum(['points', 'normal', 'uniform']).describe('drawn from a list, a normal law, or a box'),
      points: z.array(numbers).default([]).describe('positions (points)'),
      velocities: z
        .array(numbers)
        .default([])
        .describe('one velocity per point, or empty: drawn from the kinetic temperature'),
      mean: numbers.default([]).describe('normal: mean; uniform: lower corner'),
      spread: numbers.default([]).describe('normal: standard deviation; uniform: side lengths'),
      warmUp: z
        .number()
        .min(0)
        .default(0)
        .describe('time simulated before the first frame; many relaxation times give a stationary start'),
    })
    .describe('where tracks begin'),
  observation: z
    .strictObject({
      tracks: z.int().min(1).describe('number of tracks'),
      frames: z.int().min(1).describe('positions per track, lost ones included'),
      interval: z.number().positive().describe('time between frames'),
      localizationError: z.array(z.number().min(0)).describe('standard deviation per axis, length'),
      exposure: z
        .number()
        .min(0)
        .max(1)
        .default(0)
        .describe(
          'fraction of the interval a position is averaged over; the window ends at the time of the frame',
        ),
      lostFrames: z
        .number()
        .min(0)
        .lt(1)
        .default(0)
        .describe('fraction of frames lost at random; the first of a track is kept'),
    })
    .describe('how the process is recorded'),
  integration: z
    .strictObject({
      step: z
        .number()
        .positive()
        .nullable()
        .default(null)
        .describe('time step; null: chosen from the coefficients'),
      integrator: z
        .enum(['splitting', 'platen'])
        .nullable()
        .default(null)
        .describe(
          'splitting: symmetric splitting with an exact friction–noise step (second order); platen: explicit scheme of weak order 2 (first order); null: the one for the order',
        ),
    })
    .default({ step: null, integrator: null })
    .describe('how the equations of motion are solved'),
  ensemble: z
    .strictObject({
      draws: z
        .array(numbers)
        .describe(
          'coefficient vectors drawn from the uncertainty of the fit: all basis fields in model order',
        ),
    })
    .nullable()
    .default(null)
    .describe('the uncertainty of the fit, for simulate --ensemble'),
  provenance: z
    .record(z.string(), z.json())
    .default({})
    .describe('where the scenario came from: program, tracks and their hashes, seed'),
  standing: standingSchema
    .nullable()
    .default(null)
    .describe('whether the process settles on one stationary law, condition by condition'),
  warnings: z
    .array(
      z.strictObject({
        code: z.string().describe('stable name of the warning'),
        message: z.string().describe('one sentence for people'),
      }),
    )
    .default([])
    .describe('advice that simulate repeats'),
});

export type Scenario = z.output<typeof scenarioSchema>;
export type Standing = z.output<typeof standingSchema>;
export type ScenarioInput = z.input<typeof scenarioSchema>;
