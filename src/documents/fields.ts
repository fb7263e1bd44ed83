/** Schemas of basis and coefficient field, shared by fit and scenario files. */

import { z } from 'zod';

const numbers = z.array(z.number());

export const basisSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('constant') }),
  z.strictObject({
    kind: z.literal('polynomial'),
    degree: z.int().min(0).max(20).describe('largest total degree'),
    centre: numbers.describe('centre of the scaled coordinates, length'),
    scale: z.array(z.number().positive()).describe('half-width of the scaled coordinates, length'),
  }),
  z.strictObject({
    kind: z.literal('spline'),
    counts: z.array(z.int().min(1).max(1000)).describe('number of B-splines along each axis'),
    low: numbers.describe('lower edge of the box, length'),
    high: numbers.describe('upper edge of the box, length'),
    periods: z.array(z.number().min(0)).describe('period of each axis, 0 = open'),
  }),
  z.strictObject({
    kind: z.literal('waves'),
    waves: z.int().min(0).max(100).describe('largest wave number along each periodic axis'),
    periods: z.array(z.number().min(0)).describe('period of each axis, 0 = open'),
  }),
]);

export const fieldSchema = z.strictObject({
  name: z.enum(['force', 'friction', 'noise', 'drift', 'diffusion']),
  form: z.enum(['vector', 'scalar', 'axes', 'matrix']),
  link: z.enum(['identity', 'log', 'log-matrix']).describe('how the weighted sum becomes the value'),
  basis: basisSchema,
  coefficients: z.array(numbers).describe('one array of basis coefficients per component'),
});

const dimensions = z.int().min(1).max(3);
const periods = z.array(z.number().min(0)).describe('period of each axis, 0 = open');

export const modelSchema = z.discriminatedUnion('order', [
  z.strictObject({
    order: z.literal('second'),
    dimensions,
    periods,
    force: fieldSchema,
    friction: fieldSchema,
    noise: fieldSchema,
  }),
  z.strictObject({
    order: z.literal('first'),
    reading: z.literal('ito').describe('stochastic reading of the drift'),
    dimensions,
    periods,
    drift: fieldSchema,
    diffusion: fieldSchema,
  }),
]);
