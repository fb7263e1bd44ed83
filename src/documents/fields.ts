/** Schemas of basis and coefficient field, shared by fit and scenario files. */

import { z } from 'zod';

const numbers = z.array(z.number());

export const basisSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('constant').describe('one function, 1 everywhere') }),
  z.strictObject({
    kind: z.literal('polynomial').describe('all monomials up to a total degree, in scaled coordinates'),
    degree: z.int().min(0).max(20).describe('largest total degree'),
    centre: numbers.describe('centre of the scaled coordinates, length'),
    scale: z.array(z.number().positive()).describe('half-width of the scaled coordinates, length'),
  }),
  z.strictObject({
    kind: z
      .literal('spline')
      .describe('tensor product of uniform B-splines, cubic unless degree says otherwise'),
    counts: z.array(z.int().min(1).max(1000)).describe('number of B-splines along each axis'),
    low: numbers.describe('lower edge of the box, length'),
    high: numbers.describe('upper edge of the box, length'),
    periods: z.array(z.number().min(0)).describe('period of each axis, 0 = open'),
    degree: z.int().min(1).max(3).optional().describe('degree of the B-splines, 3 where absent'),
  }),
  z.strictObject({
    kind: z.literal('waves').describe('1, cos, sin, … along each periodic axis'),
    waves: z.int().min(0).max(100).describe('largest wave number along each periodic axis'),
    periods: z.array(z.number().min(0)).describe('period of each axis, 0 = open'),
  }),
]);

export const fieldSchema = z.strictObject({
  name: z.enum(['force', 'friction', 'noise', 'drift', 'diffusion']).describe('which coefficient it is'),
  form: z
    .enum(['vector', 'scalar', 'axes', 'matrix'])
    .describe('which components it has: one per axis, one for all axes, one per axis, a matrix row by row'),
  link: z.enum(['identity', 'log', 'log-matrix']).describe('how the weighted sum becomes the value'),
  basis: basisSchema.describe('functions of place that are summed'),
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
