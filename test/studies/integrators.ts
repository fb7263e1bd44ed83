/**
 * How the integrators err: order of the step in the averages of trapped particles, temperature in long runs at the
 * recommended step, and escape rates against Kramers.
 * Run with `npm run study:integrators [share] [order, temperature or escape]`; a share of 0.1 takes a tenth of the time.
 */

import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { type RandomStream, randomStream } from '../../src/numerics/random/RandomStream.js';
import { CoupledStream } from '../../src/simulation/CoupledStream.js';
import { createIntegrator } from '../../src/simulation/createIntegrator.js';
import type { Integrator } from '../../src/simulation/Integrator.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { recommendedStep } from '../../src/simulation/recommendedStep.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { printTable } from './table.js';

const share = Number(process.argv[2] ?? 1);
const only = process.argv[3] ?? '';

type Input = Partial<ScenarioInput> & Pick<ScenarioInput, 'coefficients' | 'order'>;

async function prepare(dimensions: number, input: Input): Promise<{ integrator: Integrator; step: number }> {
  const scenario = createScenario({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions,
    axes: Array.from({ length: dimensions }, () => ({ kind: 'open' as const })),
    start: { kind: 'normal', mean: new Array(dimensions).fill(0), spread: new Array(dimensions).fill(1) },
    observation: { tracks: 1, frames: 2, interval: 10, localizationError: new Array(dimensions).fill(0) },
    ...input,
  });
  const evaluator = await createScenarioEvaluator(scenario);
  return {
    integrator: createIntegrator(scenario, evaluator),
    step: recommendedStep(evaluator, scenario).step,
  };
}

const bump = '0.6+1.6*exp(-(x^2+y^2)/0.8)';

/** Trapped particles with known or well-defined configurational averages. */
const TRAPS: readonly {
  name: string;
  dimensions: number;
  input: Input;
  average: string;
  /** Coarsest step: still stable at the places visited. */
  coarsest: number;
  f: (q: Float64Array) => number;
}[] = [
  {
    name: 'quartic trap, second order',
    dimensions: 1,
    average: '⟨x²⟩',
    coarsest: 0.3,
    f: ([x]) => x * x,
    input: {
      order: 'second',
      coefficients: {
        force: { form: 'vector', formulas: ['-x^3'] },
        friction: { form: 'scalar', values: [1] },
        noise: { form: 'scalar', values: [2] },
      },
    },
  },
  {
    name: 'stirred trap with a bump of friction and noise, second order',
    dimensions: 2,
    average: '⟨x² + y²⟩',
    coarsest: 0.4,
    f: ([x, y]) => x * x + y * y,
    input: {
      order: 'second',
      coefficients: {
        force: { form: 'vector', formulas: ['-x-0.3*y', '-y+0.3*x'] },
        friction: { form: 'scalar', formulas: [bump] },
        noise: { form: 'scalar', formulas: [`2*(${bump})`] },
      },
    },
  },
  {
    name: 'trap with diffusion rising outwards, first order',
    dimensions: 1,
    average: '⟨x²⟩',
    coarsest: 0.4,
    f: ([x]) => x * x,
    input: {
      order: 'first',
      coefficients: {
        drift: { form: 'vector', formulas: ['-x'] },
        diffusion: { form: 'scalar', formulas: ['0.5*(1+x^2/4)'] },
      },
    },
  },
];

/** Differences of an average between neighbouring steps, over the same noise, with standard errors. */
function measureDifferences(
  integrator: Integrator,
  d: number,
  f: (q: Float64Array, v: Float64Array) => number,
  steps: readonly number[],
  duration = 12,
): { difference: number; error: number }[] {
  const finest = steps[steps.length - 1];
  const sampling = steps[0] * Math.max(1, Math.round(0.8 / steps[0])); // a whole number of steps at every level
  const fineSteps = Math.round(duration / finest);
  const particles = Math.round((share * 12_000_000) / (2 * fineSteps));
  const fine = new Float64Array(fineSteps * d);
  const sums = new Float64Array(steps.length - 1);
  const squares = new Float64Array(steps.length - 1);
  const q = new Float64Array(d);
  const v = new Float64Array(d);
  for (let particle = 0; particle < particles; particle++) {
    const stream: RandomStream = randomStream(1, 'order', particle);
    const start = Float64Array.from({ length: 2 * d }, () => 0.8 * stream.normal());
    for (let i = 0; i < fine.length; i++) fine[i] = stream.normal();
    const coupled = new CoupledStream([stream.bits(), stream.bits(), stream.bits(), 1]);
    const averages = steps.map((step) => {
      q.set(start.subarray(0, d));
      v.set(start.subarray(d));
      coupled.load(fine, Math.round(step / finest), d);
      const count = Math.round(duration / step);
      // the second half of the run, by which the start is forgotten to a few per cent, sampled every 0.8 or so
      const every = Math.max(1, Math.round(sampling / step));
      let sum = 0;
      let samples = 0;
      for (let done = 0; done + every <= count; done += every) {
        integrator.advance(q, v, every, step, coupled);
        if (done < count / 2) continue;
        sum += f(q, v);
        samples++;
      }
      return sum / samples;
    });
    for (let i = 0; i < sums.length; i++) {
      const difference = averages[i] - averages[i + 1];
      sums[i] += difference / particles;
      squares[i] += difference ** 2 / particles;
    }
  }
  return Array.from(sums, (sum, i) => ({
    difference: sum,
    error: Math.sqrt((squares[i] - sum * sum) / particles),
  }));
}

async function orderTable(): Promise<void> {
  const rows: string[][] = [];
  for (const { name, dimensions, input, average, coarsest, f } of TRAPS) {
    const steps = [1, 2, 4, 8].map((parts) => coarsest / parts);
    const { integrator } = await prepare(dimensions, input);
    const found = measureDifferences(integrator, dimensions, f, steps);
    const orders = found.slice(1).map((finer, i) => {
      const coarser = found[i];
      const relative = Math.hypot(coarser.error / coarser.difference, finer.error / finer.difference);
      return `${Math.log2(coarser.difference / finer.difference).toFixed(2)} ± ${(relative / Math.LN2).toFixed(2)}`;
    });
    rows.push([
      name,
      average,
      String(coarsest),
      ...found.map(({ difference, error }) => `${difference.toExponential(2)} ± ${error.toExponential(0)}`),
      ...orders,
    ]);
  }
  printTable(
    'Configurational averages: difference between steps h and h/2 over the same noise, and the order seen',
    [
      'process',
      'average',
      'h',
      'A(h) − A(h/2)',
      'A(h/2) − A(h/4)',
      'A(h/4) − A(h/8)',
      'order',
      'order, finer',
    ],
    rows,
  );
}

async function temperatureTable(): Promise<void> {
  const rows: string[][] = [];
  for (const [name, dimensions, input] of [
    ['oscillator, Γ/ω = 0.1', 1, { force: ['-x'], friction: ['0.1'], noise: ['0.2'] }],
    ['oscillator, Γ/ω = 1', 1, { force: ['-x'], friction: ['1'], noise: ['2'] }],
    ['oscillator, Γ/ω = 10', 1, { force: ['-x'], friction: ['10'], noise: ['20'] }],
    ['quartic trap, Γ = 1', 1, { force: ['-x^3'], friction: ['1'], noise: ['2'] }],
    [
      'trap with a bump of friction at one temperature',
      2,
      { force: ['-x', '-y'], friction: [bump], noise: [`2*(${bump})`] },
    ],
  ] as const) {
    const { integrator, step } = await prepare(dimensions, {
      order: 'second',
      coefficients: {
        force: { form: 'vector', formulas: [...input.force] },
        friction: { form: 'scalar', formulas: [...input.friction] },
        noise: { form: 'scalar', formulas: [...input.noise] },
      },
    });
    const [batches, perBatch] = [100, Math.round((share * 40_000_000) / 100)];
    const stream = randomStream(2, name);
    const q = Float64Array.from({ length: dimensions }, () => stream.normal());
    const v = Float64Array.from({ length: dimensions }, () => stream.normal());
    let [sum, square] = [0, 0];
    for (let batch = 0; batch < batches; batch++) {
      let mean = 0;
      for (let i = 0; i < perBatch; i++) {
        integrator.advance(q, v, 1, step, stream);
        for (let axis = 0; axis < dimensions; axis++) mean += v[axis] ** 2 / (dimensions * perBatch);
      }
      sum += mean / batches;
      square += mean ** 2 / batches;
    }
    const error = Math.sqrt((square - sum * sum) / (batches - 1));
    const kinetic = (_q: Float64Array, velocity: Float64Array): number =>
      velocity.reduce((total, value) => total + value * value, 0) / dimensions;
    const duration = 2 * step * Math.round(Math.max(12, 6 / Number(input.friction[0]) || 12) / (2 * step));
    const [{ difference, error: scatter }] = measureDifferences(
      integrator,
      dimensions,
      kinetic,
      [step, step / 2],
      duration,
    );
    const percent = (value: number): string => `${(100 * value).toFixed(3)} %`;
    rows.push([
      name,
      step.toPrecision(3),
      String(Math.round(batches * perBatch * step)),
      `${percent(sum - 1)} ± ${percent(error)}`,
      `${percent((4 / 3) * difference)} ± ${percent((4 / 3) * scatter)}`,
    ]);
  }
  printTable(
    'Temperature in one long run at the recommended step (true: 1)',
    ['process', 'step', 'length of the run', 'temperature off by', 'the same from halving the step'],
    rows,
  );
}

async function escapeTable(): Promise<void> {
  const rows: string[][] = [];
  for (const barrier of [4, 6]) {
    for (const friction of [2, 8, 24]) {
      const [wellRate, barrierRate] = [Math.sqrt(8 * barrier), Math.sqrt(4 * barrier)];
      const transmission = Math.sqrt(friction ** 2 / 4 + barrierRate ** 2) - friction / 2;
      const rate = (wellRate / (2 * Math.PI * barrierRate)) * transmission * Math.exp(-barrier);
      const { integrator } = await prepare(1, {
        order: 'second',
        coefficients: {
          force: { form: 'vector', formulas: [`${4 * barrier}*(x-x^3)`] },
          friction: { form: 'scalar', values: [friction] },
          noise: { form: 'scalar', values: [2 * friction] },
        },
      });
      const step = Math.min(0.06 / wellRate, 0.1 / friction);
      const steps = Math.round(share * 20_000_000);
      const q = new Float64Array([1]);
      const v = new Float64Array(1);
      const stream = randomStream(3, `escape ${barrier}`, friction);
      let side = 1;
      let crossings = 0;
      for (let i = 0; i < steps; i++) {
        integrator.advance(q, v, 1, step, stream);
        if (q[0] * side < -0.7) {
          side = -side;
          crossings++;
        }
      }
      const found = crossings / (steps * step) / rate;
      rows.push([
        String(barrier),
        String(friction),
        rate.toExponential(3),
        `${found.toFixed(3)} ± ${(found / Math.sqrt(crossings)).toFixed(3)}`,
      ]);
    }
  }
  printTable(
    'Escape from a quartic well, U = ΔU (x² − 1)², against Kramers (1940), spatial diffusion',
    ['ΔU/T', 'friction', 'Kramers rate', 'measured ÷ Kramers'],
    rows,
  );
}

if (only === '' || only === 'order') await orderTable();
if (only === '' || only === 'temperature') await temperatureTable();
if (only === '' || only === 'escape') await escapeTable();
