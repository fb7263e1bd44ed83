/** Tests and challenges in plain sentences, the same on the page and at the terminal. */

import { formatP } from './format.js';
import { tameText } from './html.js';
import type { ReportedChallenge, ReportedTest } from './ReportInput.js';

const STATEMENTS: Readonly<Record<string, string>> = {
  'uniform-friction': 'Friction is the same everywhere',
  'uniform-noise': 'The noise is equally strong everywhere',
  'uniform-temperature': 'The temperature is the same everywhere',
  'conservative-force': 'The force has a potential',
  'zero-force': 'There is no force',
  'isotropic-friction': 'Friction is the same in every direction',
  law: 'The coefficient follows the law',
};

const ASSUMPTIONS: Readonly<Record<string, string>> = {
  memory: 'Nothing but place and velocity is remembered',
  'speed-dependent-friction': 'Friction does not depend on speed',
  'gaussian-noise': 'The noise is Gaussian',
  stationarity: 'Nothing changed in the course of the recording',
  'independent-tracks': 'Tracks move independently of one another',
  'mislinked-jumps': 'No step is a wrong link between tracks',
};

/** A name of ours in words; any other name as it is. */
const lookUp = (table: Readonly<Record<string, string>>, name: string): string =>
  (Object.hasOwn(table, name) ? table[name] : undefined) ?? tameText(name, 100);

/** What a test asks, as a statement without full stop. */
export function sayStatement(test: ReportedTest): string {
  if (test.hypothesis === 'law' && test.law !== undefined) {
    const field = tameText(test.field ?? 'the coefficient', 30).replace('_', ' along ');
    return `${field[0]?.toUpperCase() ?? ''}${field.slice(1)} follows the law ${tameText(test.law, 100)}`;
  }
  // At first order the noise is that of the position.
  const ofDiffusion = Object.keys(test.parameters).some((name) => name.startsWith('diffusion'));
  if (test.hypothesis === 'uniform-noise' && ofDiffusion) return 'The diffusion is the same everywhere';
  return lookUp(STATEMENTS, test.hypothesis);
}

/** What a challenge tries, as a statement without full stop. */
export function sayAssumption(check: ReportedChallenge): string {
  return lookUp(ASSUMPTIONS, check.name);
}

/** `p = 0.21` or `p < 0.001`. */
export function sayP(p: number | null): string {
  if (p === null) return 'p\u00a0unknown';
  const text = formatP(p);
  return (text.startsWith('<') ? `p ${text}` : `p = ${text}`).replaceAll(' ', '\u00a0');
}

/** All tests in one sentence. */
export function sayTests(tests: readonly ReportedTest[]): string {
  const rejected = tests.filter((test) => test.rejected).length;
  if (tests.length === 1)
    return rejected === 1 ? 'The statement is rejected.' : 'Nothing speaks against the statement.';
  if (rejected === 0) return `Nothing speaks against any of the ${tests.length} statements.`;
  return rejected === tests.length
    ? `${tests.length === 2 ? 'Both' : `All ${tests.length}`} statements are rejected.`
    : `Of ${tests.length} statements ${rejected} ${rejected === 1 ? 'is' : 'are'} rejected.`;
}

/** All challenges in one sentence. */
export function sayChallenges(checks: readonly ReportedChallenge[]): string {
  const failed = checks.filter((check) => !check.holds);
  if (failed.length === 0)
    return 'The model stands every challenge: its assumptions hold as far as the data can tell.';
  const names = failed.map((check) => `“${sayAssumption(check)}”`).join(', ');
  return `The data contradict ${failed.length === 1 ? 'an assumption' : 'assumptions'} of the model: ${names}. Read its coefficients as averages over what it leaves out.`;
}
