import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { UsageError } from '../../src/errors.js';
import { type FormulaReader, loadFormulaReader } from '../../src/fields/formula.js';

let read: FormulaReader;
const xyz = { coordinates: ['x', 'y', 'z'], parameters: [] as string[] };

beforeAll(async () => {
  read = await loadFormulaReader();
});

function refusal(text: string, names: Parameters<FormulaReader>[1] = xyz): UsageError {
  try {
    read(text, names);
  } catch (error) {
    expect(error).toBeInstanceOf(UsageError);
    return error as UsageError;
  }
  throw new Error(`"${text}" was accepted`);
}

describe('values', () => {
  it.each([
    ['1 + 2 * 3 ^ 2', 19],
    ['-2 ^ 2', -4],
    ['2 ^ 3 ^ 2', 512],
    ['2 x', 3],
    ['x / y / z', 1.5 / -0.5 / 2],
    ['sin(pi / 6) + cos(0)', 1.5],
    ['log(e) + log(8, 2) + log10(100)', 6],
    ['max(x, y) - min(x, y)', 2],
    ['abs(-3) * sign(y) + z ^ 2', 1],
    ['+x - -y', 1],
    ['1e3 * x', 1500],
    ['hypot(3, 4) + sech(0)', 6],
  ])('%s is what arithmetic says', (text, value) => {
    expect(read(text, xyz).evaluate([9, 1.5, -0.5, 2], 1, [])).toBeCloseTo(value, 12);
  });

  it('takes parameters in the order of the list, or as met where names are free', () => {
    const listed = read('b * x + a', { coordinates: ['x'], parameters: ['a', 'b'] });
    expect(listed.evaluate([2], 0, [10, 3])).toBe(16);
    const free = read('g0 * (1 + a * tanh(x))', { coordinates: ['x'], parameters: 'free' });
    expect(free.parameters).toEqual(['g0', 'a']);
    expect(free.evaluate([0.5], 0, [2, 3])).toBeCloseTo(2 * (1 + 3 * Math.tanh(0.5)), 14);
  });

  it('lets a parameter called e stand before the number e', () => {
    expect(read('e', { coordinates: ['x'], parameters: ['e'] }).evaluate([0], 0, [7])).toBe(7);
  });
});

describe('derivatives', () => {
  it.each([
    'g0*(1+a*tanh(x))',
    'exp(-x^2/(2*a^2))*sin(x*y)',
    'sqrt(1+x^2)/(1+abs(y))',
    'a*x^3 - log(1+y^2)',
    'x^a',
    'x^2*y^3',
    'cbrt(x)+log10(x)',
    'asin(x)+acos(x)+atan(x)+sinh(x)+cosh(x)+tanh(x)+asinh(x)+acosh(1+x)+atanh(x)',
    'sec(x)+csc(x)+cot(x)+sech(x)+csch(x)+coth(x)+tan(x)+pow(x,a)+log(x,3)',
  ])('of %s agree with central differences', (text) => {
    const formula = read(text, { coordinates: ['x', 'y'], parameters: ['g0', 'a'] });
    const place = [0.7, -0.4];
    const parameters = [1.3, 0.8];
    ['x', 'y', 'g0', 'a'].forEach((name, index) => {
      const values = index < 2 ? place : parameters;
      const step = 1e-5;
      const shifted = (by: number): number => {
        const copy = [...values];
        copy[index % 2] += by;
        return index < 2 ? formula.evaluate(copy, 0, parameters) : formula.evaluate(place, 0, copy);
      };
      const numeric = (shifted(step) - shifted(-step)) / (2 * step);
      expect(formula.differentiate(name).evaluate(place, 0, parameters)).toBeCloseTo(numeric, 7);
    });
  });

  it('of products of many terms stay exact for second derivatives', () => {
    const formula = read('x^4', xyz);
    expect(formula.differentiate('x').differentiate('x').evaluate([2, 0, 0], 0, [])).toBeCloseTo(48, 10);
  });

  it('of functions without a rule are refused by name', () => {
    expect(() => read('atan2(x, y)', xyz).differentiate('x')).toThrow(UsageError);
    expect(() => read('x', xyz).differentiate('w')).toThrow(/no variable w/);
  });
});

describe('what is refused', () => {
  it.each([
    'process.exit(1)',
    'constructor',
    'constructor("return process")()',
    'x.constructor.constructor("return this")()',
    'import("fs")',
    'import(x)',
    'require("fs")',
    'eval("1")',
    'evaluate("1")',
    'parse("1")',
    'toString()',
    '__proto__',
    'hasOwnProperty(x)',
    'globalThis',
    'cos.constructor(x)',
    'f(x) = f(x)',
    'a = 1',
    'x; y',
    'x\ny',
    '[1, 2]',
    '{a: 1}',
    '1:10',
    'x[1]',
    '"text"',
    'x > 0',
    'x ? 1 : 2',
    'x!',
    'x % 2',
    "x'",
    'x and y',
    'true',
    'null',
    'NaN',
    'Infinity',
    '1e999',
    'i',
    '3 cm',
    'x to y',
    'random()',
    'createUnit("a")',
    'map(x, cos)',
  ])('%s', (text) => {
    expect(refusal(text).message).toContain('formula');
  });

  it('names the misspelt function, its place and the likely one', () => {
    const error = refusal('1 + tahn(x)');
    expect(error.message).toContain('tahn at character 5');
    expect(error.message).toContain('did you mean tanh?');
    expect(error.facts).toMatchObject({ name: 'tahn', character: 5 });
  });

  it('names an unknown parameter and the known ones', () => {
    const error = refusal('g1 * x', { coordinates: ['x'], parameters: ['g0', 'width'] });
    expect(error.message).toContain('did you mean g0?');
    expect(error.message).toContain('width');
  });

  it('says where reading stopped', () => {
    expect(refusal('2 * (x + 1').facts.character).toBeGreaterThan(0);
    expect(refusal('2 * * x').message).toContain('character');
    expect(refusal('   ').message).toContain('empty');
    expect(refusal('sin(x, y)').message).toContain('sin takes 1');
  });

  it('ends quickly on deep nesting, long text and many terms', () => {
    const began = performance.now();
    expect(refusal(`${'('.repeat(400)}x${')'.repeat(400)}`).message).toContain('nested');
    expect(refusal('sin('.repeat(60) + 'x' + ')'.repeat(60)).message).toContain('nested');
    expect(refusal('x+'.repeat(5000)).message).toContain('characters long');
    expect(refusal(`${'x+'.repeat(450)}x`).message).toContain('terms');
    refusal(`${'-'.repeat(900)}x`);
    refusal(`x${'^x'.repeat(400)}`);
    expect(performance.now() - began).toBeLessThan(2000);
  });

  it('anything that is not a formula, whatever the text, without any other error', () => {
    fc.assert(
      fc.property(fc.string({ maxLength: 60 }), (text) => {
        try {
          const value = read(text, { coordinates: ['x'], parameters: 'free' }).evaluate(
            [0.5],
            0,
            new Array(60).fill(1),
          );
          expect(typeof value).toBe('number');
        } catch (error) {
          expect(error).toBeInstanceOf(UsageError);
        }
      }),
      { seed: 7, numRuns: 2000 },
    );
  });
});

it('evaluates at the speed of written code', () => {
  const formula = read('g0*(1+a*tanh(x))', { coordinates: ['x'], parameters: ['g0', 'a'] });
  const place = new Float64Array([0.3]);
  const parameters = [1, 0.5];
  let sum = 0;
  const began = performance.now();
  for (let i = 0; i < 1_000_000; i++) {
    place[0] = i * 1e-6;
    sum += formula.evaluate(place, 0, parameters);
  }
  expect(sum).toBeGreaterThan(0);
  expect(performance.now() - began).toBeLessThan(1000); // an interpreter of the tree takes several seconds
});
