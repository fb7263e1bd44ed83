import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import type { Condition } from '../../src/simulation/describeConditions.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import { assessConditions, warnOfConditions } from '../../src/simulation/standingConditions.js';
import { constantField, exampleFit, trapField } from '../support/fitFixtures.js';

const TRAP: ScenarioInput = {
  format: 'wanderlaw-scenario',
  version: 1,
  dimensions: 1,
  units: { length: 'µm', time: 's' },
  order: 'second',
  axes: [{ kind: 'open' }],
  coefficients: {
    force: { form: 'vector', formulas: ['-x'] },
    friction: { form: 'scalar', values: [1] },
    noise: { form: 'scalar', values: [2] },
  },
  start: { kind: 'normal', mean: [0], spread: [1] },
  observation: { tracks: 2, frames: 3, interval: 0.1, localizationError: [0] },
};

const FIRST: Partial<ScenarioInput> = {
  order: 'first',
  coefficients: {
    drift: { form: 'vector', formulas: ['-x'] },
    diffusion: { form: 'scalar', values: [1] },
  },
};

function plane(
  coefficients: ScenarioInput['coefficients'],
  more: Partial<ScenarioInput> = {},
): ScenarioInput {
  return {
    ...TRAP,
    dimensions: 2,
    axes: [{ kind: 'open' }, { kind: 'open' }],
    coefficients: {
      ...TRAP.coefficients,
      force: { form: 'vector', formulas: ['-x', '-y'] },
      ...coefficients,
    },
    start: { kind: 'normal', mean: [0, 0], spread: [1, 1] },
    observation: { ...TRAP.observation, localizationError: [0, 0] },
    ...more,
  };
}

async function conditionsOf(input: ScenarioInput): Promise<Map<string, Condition>> {
  return new Map((await assessConditions(createScenario(input))).map((each) => [each.name, each]));
}

async function find(input: ScenarioInput, name: string): Promise<Condition> {
  const condition = (await conditionsOf(input)).get(name);
  if (condition === undefined) throw new Error(`there is no condition ${name}`);
  return condition;
}

describe('a trap with constant friction and noise', () => {
  it('satisfies every condition, each with its number', async () => {
    const conditions = await conditionsOf(TRAP);
    expect([...conditions.keys()]).toEqual([
      'friction-positive',
      'friction-bounded',
      'friction-away-from-zero',
      'noise-full-rank',
      'noise-bounded',
      'confining-force',
      'smooth-coefficients',
    ]);
    for (const { verdict } of conditions.values()) expect(verdict).toBe('holds');
    expect(conditions.get('friction-positive')?.value).toBe(1);
    expect(conditions.get('noise-full-rank')?.note).toContain('2 µm² s⁻³');
    expect(conditions.get('confining-force')?.value).toBeCloseTo(1, 9);
  });

  it('at first order is asked for diffusion and drift instead', async () => {
    const conditions = await conditionsOf({ ...TRAP, ...FIRST });
    expect([...conditions.keys()]).toEqual([
      'diffusion-full-rank',
      'diffusion-bounded',
      'confining-drift',
      'smooth-coefficients',
    ]);
    for (const { verdict } of conditions.values()) expect(verdict).toBe('holds');
  });
});

describe('friction and noise', () => {
  it('that vanish or turn negative somewhere in the box fail, with the place and the number', async () => {
    const input: ScenarioInput = {
      ...TRAP,
      coefficients: { ...TRAP.coefficients, friction: { form: 'scalar', formulas: ['(x-0.4)^2-0.01'] } },
      visited: { low: [-1], high: [1] },
    };
    const condition = await find(input, 'friction-positive');
    expect(condition.verdict).toBe('fails');
    expect(condition.value).toBeCloseTo(-0.01, 6);
    expect(condition.place?.[0]).toBeCloseTo(0.4, 3);
    expect(condition.note).toMatch(/coefficients\.friction: the smallest value is -0\.01 s⁻¹ at x = 0\.4/);
  });

  it('as matrices are judged by the eigenvalues of their symmetric part', async () => {
    const rotating = plane({ friction: { form: 'matrix', values: [1, -5, 5, 1] } });
    expect((await find(rotating, 'friction-positive')).value).toBeCloseTo(1, 12);
    const degenerate = plane(
      { noise: { form: 'matrix', formulas: ['1', 'tanh(x)', '1'] } },
      {
        visited: { low: [-30, -1], high: [30, 1] },
      },
    );
    const condition = await find(degenerate, 'noise-full-rank');
    expect(condition.verdict).toBe('fails'); // tanh(30) is 1 to rounding
    expect(condition.note).toContain('smallest eigenvalue');
  });

  it('that run to zero with the distance are not away from it, and those that grow are not bounded', async () => {
    const fading = {
      ...TRAP,
      coefficients: { ...TRAP.coefficients, friction: { form: 'scalar', formulas: ['1/(1+x^2)'] } },
    } as ScenarioInput;
    expect((await find(fading, 'friction-away-from-zero')).verdict).toBe('fails');
    const growing = {
      ...TRAP,
      coefficients: { ...TRAP.coefficients, noise: { form: 'scalar', formulas: ['1+x^2'] } },
    } as ScenarioInput;
    expect((await find(growing, 'noise-bounded')).verdict).toBe('fails');
    const bounded = {
      ...TRAP,
      coefficients: { ...TRAP.coefficients, noise: { form: 'scalar', formulas: ['2+tanh(x)'] } },
    } as ScenarioInput;
    const condition = await find(bounded, 'noise-bounded');
    expect(condition.verdict).toBe('unknown');
    expect(condition.note).toMatch(/as far as was probed/);
  });

  it('that the continuation leads to zero fail, naming the continuation', async () => {
    const input: ScenarioInput = {
      ...TRAP,
      visited: { low: [-2], high: [2] },
      continuation: { kind: 'fade', width: 1, towards: { friction: [0] }, stiffness: 1 },
    };
    const condition = await find(input, 'friction-positive');
    expect(condition.verdict).toBe('fails');
    expect(condition.note).toMatch(/0 s⁻¹ at x = 4 \(in the continuation\)/);
    const { warnings } = await simulateScenario(createScenario(input), { seed: 1 });
    expect(warnings.map(({ code }) => code)).toContain('standing-friction-positive');
  });

  it('that are positive in the best coefficients but not in the draws cannot be told', async () => {
    const fit = exampleFit({
      model: {
        order: 'second',
        dimensions: 1,
        periods: [0],
        force: trapField('force', 1, [0]),
        friction: {
          ...constantField('friction', 'scalar', [1]),
          basis: { kind: 'polynomial', degree: 1, centre: [0], scale: [3] },
          coefficients: [[1, 0.9]],
        },
        noise: constantField('noise', 'scalar', [2]),
      },
      scatter: 0.1,
    });
    const scenario = buildScenario(fit);
    const judge = async (draws?: number[][]): Promise<Condition | undefined> =>
      (await assessConditions(scenario, { draws })).find(({ name }) => name === 'friction-positive');
    expect((await judge())?.verdict).toBe('holds');
    const uncertain = await judge(scenario.ensemble?.draws);
    expect(uncertain?.verdict).toBe('unknown');
    expect(uncertain?.note).toMatch(/in \d+ % of the coefficient draws/);
  });
});

describe('the force on open axes', () => {
  const box = { visited: { low: [-2], high: [2] } };

  it('holds where a continuation confines, and fails where it fades to a constant', async () => {
    const confining = await find(
      { ...TRAP, ...box, continuation: { kind: 'confine', stiffness: 3 } },
      'confining-force',
    );
    expect([confining.verdict, confining.value]).toEqual(['holds', 3]);
    const fading = await find(
      { ...TRAP, ...box, continuation: { kind: 'fade', width: 1 } },
      'confining-force',
    );
    expect(fading.verdict).toBe('fails');
    expect(fading.note).toContain('continuation');
  });

  it('held at the edge is judged by the weakest inward force on the faces', async () => {
    const held = await find({ ...TRAP, ...box }, 'confining-force');
    expect([held.verdict, held.value]).toEqual(['holds', 2]);
    const leaking = await find(
      plane(
        { force: { form: 'vector', formulas: ['-x', '-y+0.9*x'] } },
        { visited: { low: [-2, -1], high: [2, 1] } },
      ),
      'confining-force',
    );
    expect(leaking.verdict).toBe('fails');
    expect(leaking.value).toBeCloseTo(1 - 1.8, 9);
    expect(Math.abs(leaking.place?.[0] ?? 0)).toBeCloseTo(2, 9);
  });

  it('fails for free particles, and is free on closed axes', async () => {
    const free = {
      ...TRAP,
      coefficients: { ...TRAP.coefficients, force: { form: 'vector', values: [0] } },
    } as ScenarioInput;
    expect((await find(free, 'confining-force')).verdict).toBe('fails');
    for (const kind of ['periodic', 'walls'] as const) {
      const closed = await find(
        { ...free, axes: [{ kind, low: 0, high: 3 }], start: { kind: 'points', points: [[1]] } },
        'confining-force',
      );
      expect(closed.verdict).toBe('holds');
    }
  });

  it('that stirs a linear trap is confining up to a² < Γ²k, the bound of stability', async () => {
    // q̈ = −q + a J q − q̇ with J a quarter turn: roots of s² + s + 1 ∓ ia lie left of the axis for a < 1 (Routh–Hurwitz).
    const stirred = (a: number): ScenarioInput =>
      plane({ force: { form: 'vector', formulas: [`-x-${a}*y`, `-y+${a}*x`] } });
    expect((await find(stirred(0.99), 'confining-force')).verdict).toBe('holds');
    expect((await find(stirred(1.01), 'confining-force')).verdict).toBe('unknown');
    expect(
      (await find(plane({ force: { form: 'vector', formulas: ['-x', '0.1*y'] } }), 'confining-force'))
        .verdict,
    ).toBe('fails');
  });

  it('written as another formula cannot be told, or fails where it points outward far out', async () => {
    const quartic = await find(
      { ...TRAP, coefficients: { ...TRAP.coefficients, force: { form: 'vector', formulas: ['x-x^3'] } } },
      'confining-force',
    );
    expect(quartic.verdict).toBe('unknown');
    const escaping = await find(
      {
        ...TRAP,
        coefficients: { ...TRAP.coefficients, force: { form: 'vector', formulas: ['-x+0.001*x^3'] } },
      },
      'confining-force',
    );
    expect(escaping.verdict).toBe('fails');
  });
});

it.each([
  ['-x*exp(-x^2/2)+tanh(x/3)', 'holds'],
  ['-abs(x)*x', 'holds'],
  ['-sign(x)', 'fails'],
  ['-x/(1+x^2)', 'unknown'],
  ['-x*sqrt(x^2)', 'unknown'],
  ['-x^1.5', 'unknown'],
])('the formula %s is smooth: %s', async (formula, verdict) => {
  const input = {
    ...TRAP,
    coefficients: { ...TRAP.coefficients, force: { form: 'vector', formulas: [formula] } },
  } as ScenarioInput;
  expect((await find(input, 'smooth-coefficients')).verdict).toBe(verdict);
});

it('a failing condition gives a warning that simulate repeats, afresh after a change of the file', async () => {
  const free = createScenario({
    ...TRAP,
    coefficients: { ...TRAP.coefficients, force: { form: 'vector', values: [0] } },
    warnings: [{ code: 'standing-friction-positive', message: 'of an earlier version of the file' }],
  });
  const warnings = warnOfConditions(await assessConditions(free));
  expect(warnings.map(({ code }) => code)).toEqual(['standing-confining-force']);
  expect((await simulateScenario(free, { seed: 1 })).warnings).toEqual(warnings);
});
