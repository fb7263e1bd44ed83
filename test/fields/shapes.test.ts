import { describe, expect, it } from 'vitest';
import { UsageError } from '../../src/errors.js';
import { parseShape, resolveBasis, type ShapeContext } from '../../src/fields/shapes.js';

const PLANE: ShapeContext = { low: [-2, 0], high: [4, 1], periods: [0, 0], positions: 10_000 };
const STRIPES: ShapeContext = { low: [-2, 0.1], high: [4, 2.9], periods: [0, 3], positions: 10_000 };

describe('shapes', () => {
  it('are read as users write them', () => {
    const shapes: [string, object][] = [
      ['zero', { kind: 'zero' }],
      ['constant', { kind: 'constant' }],
      [' linear ', { kind: 'polynomial', degree: 1 }],
      ['polynomial:0', { kind: 'polynomial', degree: 0 }],
      ['polynomial:12', { kind: 'polynomial', degree: 12 }],
      ['spline', { kind: 'spline', count: null }],
      ['spline:4', { kind: 'spline', count: 4 }],
      ['spline:60', { kind: 'spline', count: 60 }],
      ['waves:2', { kind: 'waves', waves: 2 }],
    ];
    for (const [text, shape] of shapes) expect(parseShape(text, '--force')).toEqual(shape);
  });

  it.each([
    'cubic',
    '',
    'spline:3',
    'spline:61',
    'spline:7.5',
    'spline:',
    'spline:x',
    'spline:8:8',
    'polynomial',
    'polynomial:-1',
    'polynomial:13',
    'waves',
    'waves:0',
    'waves:31',
    'zero:1',
    'constant:2',
    'linear:3',
    'Spline',
    'law:a*x',
  ])('"%s" is refused in a sentence that names the option and what would do', (text) => {
    const parse = () => parseShape(text, '--friction');
    expect(parse).toThrow(UsageError);
    expect(parse).toThrow(`--friction "${text}"`);
    expect(parse).toThrow(/use one of zero, constant, linear, polynomial:N, spline, spline:N or waves:N$/);
  });

  it('become bases over the visited box', () => {
    expect(resolveBasis({ kind: 'zero' }, PLANE, '--force')).toBeNull();
    expect(resolveBasis({ kind: 'constant' }, PLANE, '--force')).toEqual({ kind: 'constant' });
    expect(resolveBasis({ kind: 'polynomial', degree: 2 }, PLANE, '--force')).toEqual({
      kind: 'polynomial',
      degree: 2,
      centre: [1, 0.5],
      scale: [3, 0.5],
    });
    expect(resolveBasis({ kind: 'spline', count: 6 }, STRIPES, '--force')).toEqual({
      kind: 'spline',
      counts: [6, 6],
      low: [-2, 0],
      high: [4, 3],
      periods: [0, 3],
    });
    expect(resolveBasis({ kind: 'waves', waves: 2 }, STRIPES, '--force')).toEqual({
      kind: 'waves',
      waves: 2,
      periods: [0, 3],
    });
  });

  it('of automatic size grow with the positions and stay in bounds', () => {
    const count = (positions: number, dimensions: number): number => {
      const spec = resolveBasis(
        { kind: 'spline', count: null },
        {
          low: new Array<number>(dimensions).fill(0),
          high: new Array<number>(dimensions).fill(1),
          periods: new Array<number>(dimensions).fill(0),
          positions,
        },
        '--force',
      );
      if (spec?.kind !== 'spline') throw new Error('not a spline');
      return spec.counts[0];
    };
    for (const dimensions of [1, 2, 3]) {
      expect(count(10, dimensions)).toBe(4);
      for (let positions = 20; positions < 1e7; positions *= 2) {
        expect(count(positions, dimensions)).toBeLessThanOrEqual(count(2 * positions, dimensions));
      }
    }
    expect(count(400, 1)).toBe(20); // 20 positions per function
  });

  it('that cannot be are refused: polynomials around a circle, waves on a line', () => {
    const around = () => resolveBasis({ kind: 'polynomial', degree: 1 }, STRIPES, '--force');
    expect(around).toThrow(UsageError);
    expect(around).toThrow(/--force asks for a polynomial.*periodic axis; use spline or waves:N/);
    expect(resolveBasis({ kind: 'polynomial', degree: 0 }, STRIPES, '--force')?.kind).toBe('polynomial');
    const straight = () => resolveBasis({ kind: 'waves', waves: 1 }, PLANE, '--noise');
    expect(straight).toThrow(UsageError);
    expect(straight).toThrow(/--noise asks for waves.*--period or use spline/);
  });

  it('over a region without width still have a scale', () => {
    const spec = resolveBasis(
      { kind: 'polynomial', degree: 1 },
      { low: [3], high: [3], periods: [0], positions: 5 },
      '--force',
    );
    expect(spec).toMatchObject({ scale: [1] });
  });
});
