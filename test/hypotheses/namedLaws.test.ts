import { describe, expect, it } from 'vitest';
import { UsageError } from '../../src/errors.js';
import { loadFormulaReader } from '../../src/fields/formula.js';
import { NAMED_LAWS, writeNamedLaw } from '../../src/hypotheses/namedLaws.js';
import { type LawContext, resolveLaws } from '../../src/hypotheses/resolveLaw.js';
import { perpendicularDrag } from '../support/wallCorrections.js';

const readFormula = await loadFormulaReader();
const context: LawContext = {
  readFormula,
  coordinates: ['x'],
  field: 'diffusion',
  laws: {},
  start: {},
  fixed: {},
};

/** Diffusion of a shelf law at the height h of the centre of a sphere of radius 1, relative to the free one. */
function mobilityOf(name: string): (height: number) => number {
  const [{ formula, fixed }] = resolveLaws([name], { ...context, fixed: { radius: 1 } });
  const parameters = Float64Array.from(formula.parameters, (key) => ({ c0: 1, ...fixed })[key] ?? Number.NaN);
  return (height) => formula.evaluate([height], 0, parameters);
}

describe('laws near a wall', () => {
  // cosh α, λ: Happel & Brenner, Low Reynolds Number Hydrodynamics (1983), table 7-4.1, sphere towards a plane wall, and
  // Brenner 1961, table 1 (from memory)
  const TABLE = [
    [1.1276, 9.2518],
    [1.5431, 3.0361],
    [2.3524, 1.8375],
    [3.7622, 1.4129],
    [6.1323, 1.222],
    [10.0677, 1.1252],
  ] as const;

  it.each(TABLE)('the exact series gives the tabulated drag at height %f: %f', (height, drag) => {
    // heights are tabulated to four decimals: near contact that moves the drag by dλ/dh · 5e-5 ≈ 0.004
    const slope = (perpendicularDrag(height + 1e-4) - perpendicularDrag(height - 1e-4)) / 2e-4;
    expect(Math.abs(perpendicularDrag(height) - drag)).toBeLessThan(5e-5 * Math.abs(slope) + 5e-5);
  });

  it('wall-perpendicular stays within 1 % of the exact series at every height', () => {
    const mobility = mobilityOf('wall-perpendicular');
    for (let gap = 0.01; gap < 30; gap *= 1.3)
      expect(Math.abs(mobility(1 + gap) * perpendicularDrag(1 + gap) - 1)).toBeLessThan(0.01);
  });

  it('faxen-perpendicular is within 1 % of the exact series above three radii, and off by a third below one and a half', () => {
    const mobility = mobilityOf('faxen-perpendicular');
    for (let height = 3; height < 60; height *= 1.3)
      expect(Math.abs(mobility(height) * perpendicularDrag(height) - 1)).toBeLessThan(0.01);
    expect(mobility(1.4) * perpendicularDrag(1.4)).toBeGreaterThan(1.2);
  });

  it('faxen-parallel gives the tabulated drag along a wall', () => {
    // exact values by bispherical coordinates at h/a = 10.0677, 3.7622, 2.3524, 1.5431: 1.0591, 1.1738, 1.3079, 1.5675
    // (Goldman, Cox & Brenner, Chem. Eng. Sci. 22 (1967) 637, table 2; from memory)
    const mobility = mobilityOf('faxen-parallel');
    const exact = [
      [10.0677, 1.0591],
      [3.7622, 1.1738],
      [2.3524, 1.3079],
      [1.5431, 1.5675],
    ];
    for (const [height, drag] of exact) {
      // the series breaks off after the fifth power of a/h; the table has four decimals
      const left = 0.2 * height ** -6 + 5e-5;
      expect(Math.abs(mobility(height) * drag - 1)).toBeLessThan(left);
    }
  });

  it('friction is the inverse of the mobility', () => {
    const VALUES: Readonly<Record<string, number>> = {
      c0: 1,
      radius: 1,
      wall: 0.2,
      k: 0.5,
      concentration: 0.3,
    };
    for (const law of NAMED_LAWS) {
      if (typeof law.formula === 'string' || law.name === 'stokes') continue;
      const values = ['friction', 'diffusion'].map((coefficient) => {
        const formula = readFormula(writeNamedLaw(law, coefficient, 'x'), {
          coordinates: ['x'],
          parameters: 'free',
        });
        return formula.evaluate(
          [3.1],
          0,
          formula.parameters.map((name) => VALUES[name] ?? Number.NaN),
        );
      });
      expect(values[0] * values[1]).toBeCloseTo(1, 12);
    }
  });
});

describe('laws by name', () => {
  it('are all formulas that can be read, with source and range', () => {
    for (const law of NAMED_LAWS) {
      for (const coefficient of ['friction', 'diffusion']) {
        const text = writeNamedLaw(law, coefficient, 'y');
        const formula = readFormula(text, { coordinates: ['x', 'y'], parameters: 'free' });
        expect(formula.parameters.length).toBeGreaterThan(0);
      }
      expect(law.source.length * law.range.length * law.about.length).toBeGreaterThan(0);
    }
  });

  it('run along the coordinate that is named, or the usual one', () => {
    const plane = { ...context, coordinates: ['x', 'y'] };
    expect(resolveLaws(['linear'], plane)[0].formula.text).toBe('c0 + c1*x');
    expect(resolveLaws(['linear:y'], plane)[0].formula.text).toBe('c0 + c1*y');
    expect(resolveLaws(['faxen-parallel'], plane)[0].formula.text).toContain('y-wall');
    expect(() => resolveLaws(['linear:z'], plane)).toThrow(UsageError);
  });

  it('of the study come before those of the shelf', () => {
    const laws = { linear: { formula: 'a+b*x^2', start: { a: 2 }, about: '', source: '', range: '' } };
    const [law] = resolveLaws(['linear'], { ...context, laws });
    expect(law.formula.text).toBe('a+b*x^2');
    expect(law.start).toEqual({ a: 2 });
  });

  it('hold what they hold until a start value frees it', () => {
    expect(resolveLaws(['faxen-parallel'], context)[0].fixed).toEqual({ wall: 0 });
    expect(resolveLaws(['faxen-parallel'], { ...context, start: { wall: 0.1 } })[0].fixed).toEqual({});
    expect(resolveLaws(['faxen-parallel'], { ...context, fixed: { wall: 3 } })[0].fixed).toEqual({ wall: 3 });
  });

  it('refuse values for parameters they do not have', () => {
    expect(() => resolveLaws(['linear'], { ...context, start: { c3: 1 } })).toThrow(/c3.*c0, c1/);
  });
});
