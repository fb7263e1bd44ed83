/** The examples in docstrings compile, run, and print what they say they print. */

import { execFileSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import ts from 'typescript';
import { afterAll, describe, expect, test } from 'vitest';
import * as library from '../../src/index.js';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));

interface Example {
  /** The function it explains. */
  readonly name: string;
  readonly code: string;
  /** Lines printed, where the example says so behind an arrow; null: any text. */
  readonly printed: readonly (string | null)[];
}

/** Every `@example` in the docstrings of a file. */
function listExamples(text: string): Example[] {
  return [...text.matchAll(/^\/\*\*\n((?: \*.*\n)*?) \*\/\nexport (?:async )?function\*? (\w+)/gm)].flatMap(
    ([, docstring, name]) =>
      docstring
        .split(/^ \* @example\n/m)
        .slice(1)
        .map((block) => {
          const code = block.split(/^ \* @/m)[0].replace(/^ \* ?/gm, '');
          const calls = [...code.matchAll(/console\.log\(.*\);(?: \/\/ → (.*)| \/\/ .*)?$/gm)];
          return { name, code, printed: calls.map(([, said]) => said ?? null) };
        }),
  );
}

const examples = readdirSync(`${ROOT}/src`, { recursive: true, encoding: 'utf8' })
  .filter((path) => path.endsWith('.ts'))
  .flatMap((path) => listExamples(readFileSync(`${ROOT}/src/${path}`, 'utf8')));

/** What every example may use: the library, and a small recording with its fit and scenario. */
const PRELUDE = `import * as library from '${ROOT}/src/index.js';
const { ${Object.keys(library).join(', ')} } = library;
const given = await (async () => {
  const scenario = createScenario({
    format: 'wanderlaw-scenario', version: 1, dimensions: 1, order: 'second', axes: [{ kind: 'open' }],
    coefficients: {
      force: { form: 'vector', formulas: ['-x'] },
      friction: { form: 'scalar', values: [1] },
      noise: { form: 'scalar', values: [2] },
    },
    start: { kind: 'normal', mean: [0], spread: [1], warmUp: 10 },
    observation: { tracks: 40, frames: 150, interval: 0.2, localizationError: [0.01] },
  });
  const { tracks } = await simulateScenario(scenario, { seed: 3 });
  const study = studySchema.parse({ order: 'second', force: 'linear', friction: 'constant', noise: 'constant' });
  return { scenario, tracks, study, fit: await fitTracks(tracks, study) };
})();
`;

/** One module with a function per example. */
const MODULE =
  PRELUDE +
  examples
    .map(({ code }, i) => {
      // A name the example declares itself is not handed in.
      const names = ['scenario', 'tracks', 'study', 'fit'].filter(
        (name) => !new RegExp(`const (?:${name}\\b|\\{[^}]*\\b${name}\\b[^}]*\\} =)`).test(code),
      );
      return `await (async ({ ${names.join(', ')} }: typeof given) => {
console.log('\\u0001${i}');
${code}})(given);
`;
    })
    .join('');

describe('examples in docstrings', () => {
  const directory = mkdtempSync(join(tmpdir(), 'wanderlaw-examples-'));
  afterAll(() => rmSync(directory, { recursive: true, force: true }));
  const file = join(directory, 'examples.ts');
  writeFileSync(file, MODULE);
  writeFileSync(join(directory, 'package.json'), '{"type": "module"}');

  test('are there for everything a first program calls', () => {
    const explained = examples.map(({ name }) => name);
    for (const name of [
      'importTracks',
      'surveyTracks',
      'fitTracks',
      'evaluateFit',
      'testHypothesis',
      'challengeModel',
      'resimulate',
      'buildScenario',
      'createScenario',
      'simulateScenario',
      'assessStanding',
      'renderReport',
      'drawReport',
      'formatTrackTable',
    ])
      expect(explained).toContain(name);
    expect(explained.filter((name) => !(name in library))).toEqual([]);
  });

  test('compile', () => {
    const program = ts.createProgram([file], {
      target: ts.ScriptTarget.ES2023,
      module: ts.ModuleKind.NodeNext,
      moduleResolution: ts.ModuleResolutionKind.NodeNext,
      lib: ['lib.es2023.d.ts'],
      types: ['node'],
      typeRoots: [`${ROOT}/node_modules/@types`],
      strict: true,
      noEmit: true,
      skipLibCheck: true,
      resolveJsonModule: true,
    });
    const source = program.getSourceFile(file);
    const faults = [...program.getSyntacticDiagnostics(source), ...program.getSemanticDiagnostics(source)];
    expect(faults.map(({ messageText }) => ts.flattenDiagnosticMessageText(messageText, ' '))).toEqual([]);
  });

  test('run, and print what they say', () => {
    const text = execFileSync(process.execPath, ['--import', import.meta.resolve('tsx'), file], {
      encoding: 'utf8',
    });
    const printed = text
      .split('\u0001')
      .slice(1)
      .map((part) => part.split('\n').slice(1, -1));
    expect(printed.length).toBe(examples.length);
    examples.forEach((example, i) => {
      const said = example.printed.map((line, at) => line ?? printed[i][at]);
      expect([example.name, ...printed[i]]).toEqual([example.name, ...said]);
    });
  });
});
