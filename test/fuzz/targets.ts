/** What is fuzzed: readers of files and formulas, each with real examples and what must hold of anything it accepts. */

import { readFileSync } from 'node:fs';
import { parseFit } from '../../src/documents/parseFit.js';
import { completeStudy, parseStudyInput } from '../../src/documents/parseStudy.js';
import { studySchema } from '../../src/documents/Study.js';
import { type FormulaReader, loadFormulaReader } from '../../src/fields/formula.js';
import { parseShape } from '../../src/fields/shapes.js';
import { fitTracks } from '../../src/fit.js';
import type { RandomStream } from '../../src/numerics/random/RandomStream.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { parseScenario } from '../../src/simulation/parseScenario.js';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { evaluateFit } from '../../src/uncertainty/evaluateFit.js';
import { importText } from '../import/sources.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { damageBytes, damageText, damageValue } from './mutate.js';

export interface Target {
  readonly name: string;
  /** Makes one case; it is shown where it fails. */
  draw(stream: RandomStream): Uint8Array | string;
  /** Accepts the case, or throws; anything but an expected failure is a fault. */
  read(input: Uint8Array | string): Promise<void> | void;
}

const SCENARIO = {
  format: 'wanderlaw-scenario',
  version: 1,
  title: 'a windy ring with a hot side',
  dimensions: 2,
  units: { length: 'um', time: 's' },
  order: 'second',
  axes: [{ kind: 'periodic', low: 0, high: 10 }, { kind: 'open' }],
  parameters: { wind: 1, k: 4, g: 2, hot: 0.5 },
  coefficients: {
    force: { form: 'vector', formulas: ['wind', '-k*y'] },
    friction: { form: 'scalar', values: [2] },
    noise: { form: 'axes', formulas: ['2*g*(1+hot*cos(2*pi*x/10))', '4'] },
  },
  start: { kind: 'uniform', mean: [0, -1], spread: [10, 2], warmUp: 20 },
  observation: { tracks: 20, frames: 200, interval: 0.1, localizationError: [0.02, 0.02] },
};

const STUDY = {
  order: 'second',
  force: 'spline:8',
  friction: 'polynomial:3',
  noise: 'waves:2',
  replicates: 50,
  confidence: 0.9,
  localizationError: 0.02,
  columns: { track: 'ID', x: 'PosX' },
  period: [4, 0],
  units: { length: 'um', time: 's' },
  laws: { ramp: { formula: 'g0 + g1*x', source: 'our guess', range: '0 < x < 4' } },
};

const FORMULAS = [
  'g0*(1+a*tanh(x/w))',
  '-k*x^3 + 2.5e-3*sin(2*pi*y/l)',
  'max(a, min(x, b))/hypot(x, y)',
  '((a))*exp(-(x^2+y^2)/(2*w^2))',
];

const TABLES = [
  'track,time,x,y\n1,0,0.5,1\n1,0.1,0.7,1.2\n1,0.2,0.6,1.1\n2,0,3,4\n2,0.1,3.5,4\n2,0.3,3.25,4.5\n',
  '\ufeffID;frame;x\r\na;1;1,5\r\na;2;1,75\r\na;3;2,0\r\n# a comment\r\nb;1;-3e-2\r\nb;2;0,5\r\n',
  'type\ttrack\ttime\tx\terror_x\n"hot one"\t"a ""b"""\t0\t1\t0.1\n"hot one"\t"a ""b"""\t1\t2\t0.1\n"hot one"\t"a ""b"""\t2\t2.5\t0.2\n',
];

/** All targets; `tables` adds real files to the tables that are damaged. */
export async function createTargets(): Promise<Target[]> {
  const fit = await makeFit();
  const readFormula = await loadFormulaReader();
  const datasets = ['felt-table', 'settling-beads', 'stripe-cells'].map((name) => {
    const text = readFileSync(new URL(`../../datasets/${name}/tracks.csv`, import.meta.url), 'utf8');
    return text.split('\n').slice(0, 40).join('\n');
  });
  const scenario = JSON.parse(
    JSON.stringify(buildScenario(parseFit(fit, { source: 'fit.json' }))),
  ) as unknown;
  const { length: dimensions } = fit.data.coordinates;
  const centre = fit.visited.low.map((low, axis) => (low + fit.visited.high[axis]) / 2);
  return [
    tableTarget([...TABLES, ...datasets]),
    documentTarget('study', [STUDY, fit.study], readStudy),
    documentTarget('fit', [fit], (value) => {
      const document = parseFit(value, { source: 'fit.json' });
      if (document.model.dimensions === dimensions) evaluateFit(document, Float64Array.from(centre));
    }),
    documentTarget('scenario', [SCENARIO, scenario], (value) => readScenario(value)),
    formulaTarget(readFormula),
  ];
}

async function makeFit() {
  const tracks = simulateSecondOrder({ tracks: 8, frames: 80, friction: 0.3, stiffness: 0.05, seed: 4 });
  const study = studySchema.parse({
    order: 'second',
    estimator: 'differences',
    force: 'spline:4',
    friction: 'constant',
    noise: 'linear',
    replicates: 20,
  });
  const result = await fitTracks(tracks, study);
  const document = {
    format: 'wanderlaw-fit',
    version: 1,
    program: 'wanderlaw',
    created: '2025-01-01T00:00:00.000Z',
    timing: {},
    sources: [{ path: 'tracks.csv', sha256: 'ab'.repeat(32) }],
    ...result,
  };
  return parseFit(JSON.parse(JSON.stringify(document)), { source: 'fit.json' });
}

function tableTarget(tables: readonly string[]): Target {
  return {
    name: 'table',
    draw: (stream) => damageBytes(tables[stream.integer(tables.length)], stream),
    read: async (input) => {
      const { tracks } = await importText(input as Uint8Array, { skipInvalid: input.length % 3 === 0 });
      checkTracks(tracks);
    },
  };
}

/** What must hold of every track store, whatever it was read from. */
function checkTracks({
  times,
  positions,
  trackOffsets,
  trackNames,
  dimensions,
  samplingInterval,
}: TrackSet): void {
  const complain = (what: string): never => {
    throw new Error(`accepted a table with ${what}`);
  };
  if (trackNames.length !== trackOffsets.length - 1) complain('a nameless track');
  if (positions.length !== times.length * dimensions) complain('rows without positions');
  if (!(samplingInterval > 0) || samplingInterval === Infinity) complain(`the interval ${samplingInterval}`);
  if (!positions.every(Number.isFinite) || !times.every(Number.isFinite))
    complain('numbers that are not finite');
  for (let track = 0; track + 1 < trackOffsets.length; track++) {
    for (let row = trackOffsets[track] + 1; row < trackOffsets[track + 1]; row++) {
      if (!(times[row] > times[row - 1])) complain('times that do not increase');
    }
  }
}

function documentTarget(
  name: string,
  examples: readonly unknown[],
  read: (value: unknown) => Promise<void> | void,
): Target {
  const texts = examples.map((example) => JSON.stringify(example, null, 1));
  return {
    name,
    draw: (stream) => {
      const example = stream.integer(examples.length);
      return stream.integer(3) === 0
        ? damageText(texts[example], stream)
        : (JSON.stringify(damageValue(examples[example], stream)) ?? 'null');
    },
    read: (input) => {
      let value: unknown;
      try {
        value = JSON.parse(input as string);
      } catch {
        return undefined; // no JSON: refused by the reader of files before anything here
      }
      return read(value);
    },
  };
}

function readStudy(value: unknown): void {
  const study = completeStudy(parseStudyInput(value, { source: 'study.json' }));
  for (const shape of [study.force, study.friction, study.noise]) parseShape(shape, '--force');
}

async function readScenario(value: unknown): Promise<void> {
  const scenario = parseScenario(value, 'scenario.json');
  const evaluator = await createScenarioEvaluator(scenario);
  const force = new Float64Array(scenario.dimensions);
  const bath = (): Float64Array => new Float64Array(evaluator.bathSize);
  evaluator.evaluateInto(new Float64Array(scenario.dimensions), force, bath(), bath());
}

function formulaTarget(readFormula: FormulaReader): Target {
  const names = { coordinates: ['x', 'y'], parameters: 'free' } as const;
  return {
    name: 'formula',
    draw: (stream) => damageText(FORMULAS[stream.integer(FORMULAS.length)], stream),
    read: (input) => {
      const formula = readFormula(input as string, names);
      const value = formula.evaluate(
        Float64Array.of(0.5, -2),
        0,
        new Float64Array(formula.parameters.length).fill(0.7),
      );
      if (typeof value !== 'number') throw new Error(`accepted a formula whose value is a ${typeof value}`);
    },
  };
}
