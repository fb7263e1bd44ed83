/**
 * The scenario file: a calibrated model that someone else can read, change and run.
 * A person can write one by hand: coefficients may be fitted bases or formulas of place with named parameters.
 */

import { z } from 'zod';
import { fieldSchema } from './fields.js';

const numbers = z.array(z.number());

const formulaField = z
  .strictObject({
    form: z.enum(['vector', 'scalar', 'axes', 'matrix']).describe('as in fit files: which components follow'),
    formulas: z.array(z.string()).describe('one formula per component, of x, y, z and the named parameters'),
  })
  .describe('a coefficient written as formulas');
const constantField = z
  .strictObject({
    form: z.enum(['vector', 'scalar', 'axes', 'matrix']).describe('as in fit files: which components follow'),
    values: numbers.describe('one number per component'),
  })
  .describe('a coefficient that is the same everywhere');
const coefficient = z.union([fieldSchema, formulaField, constantField]);

export const scenarioSchema = z.strictObject({
  format: z.literal('wanderlaw-scenario').describe('says what the file is'),
  version: z.literal(1).describe('version of the format'),
  title: z.string().default('').describe('one line for people'),
  dimensions: z.int().min(1).max(3).describe('number of coordinates: x; x and y; x, y and z'),
  units: z
    .strictObject({ length: z.string().nullable(), time: z.string().nullable() })
    .default({ length: null, time: null })
    .describe('labels of the length and time units, or null'),
  mass: z
    .number()
    .positive()
    .nullable()
    .default(null)
    .describe('mass of a particle, where forces are wanted in mass units'),
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
      force: coefficient.optional(),
      friction: coefficient.optional(),
      noise: coefficient.optional(),
      drift: coefficient.optional(),
      diffusion: coefficient.optional(),
    })
    .describe('force, friction and noise at second order; drift and diffusion at first'),
  continuation: z
    .strictObject({
      kind: z
        .enum(['hold', 'fade', 'confine'])
        .describe(
          'outside the visited region: hold the edge value; fade to the mean over `width`; hold, with a restoring force of strength `stiffness`',
        ),
      width: z
        .number()
        .positive()
        .nullable()
        .default(null)
        .describe('length over which coefficients fade (fade)'),
      stiffness: z
        .number()
        .positive()
        .nullable()
        .default(null)
        .describe('1/time² (second order), 1/time (first order)'),
    })
    .default({ kind: 'hold', width: null, stiffness: null })
    .describe('what the coefficients are outside the visited box'),
  visited: z
    .strictObject({ low: numbers, high: numbers })
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
    })
    .default({ step: null })
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
  warnings: z
    .array(z.strictObject({ code: z.string(), message: z.string() }))
    .default([])
    .describe('advice that simulate repeats'),
});

export type Scenario = z.output<typeof scenarioSchema>;
export type ScenarioInput = z.input<typeof scenarioSchema>;
