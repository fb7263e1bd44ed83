/** What `test --json` and `challenge --json` print, as far as a report shows it; further keys are left alone. */

import { z } from 'zod';
import { checkDocument, type DocumentPlace } from './checkDocument.js';

const maybeNumber = z.number().nullable();
/** JSON has no NaN: what could not be told is null there. */
const knownOrNaN = maybeNumber.transform((value) => value ?? Number.NaN);

export const testResultSchema = z.looseObject({
  hypothesis: z.string(),
  statistic: maybeNumber,
  p: maybeNumber,
  rejected: z.boolean(),
  parameters: z
    .record(z.string(), z.looseObject({ value: knownOrNaN, low: knownOrNaN, high: knownOrNaN }))
    .default({}),
  note: z.string(),
});

export const challengeResultSchema = z.looseObject({
  checks: z.array(z.looseObject({ name: z.string(), p: maybeNumber, holds: z.boolean(), note: z.string() })),
});

export type TestResult = z.output<typeof testResultSchema>;
export type ChallengeResult = z.output<typeof challengeResultSchema>;

type Place = Omit<DocumentPlace, 'kind'>;

/**
 * The tests of one file: one result, or a list of them.
 *
 * @throws UsageError  where the value is not what `test --json` writes
 */
export function parseTestResults(value: unknown, place: Place): TestResult[] {
  const list: unknown[] = Array.isArray(value) ? value : [value];
  return list.map((item) => checkDocument(testResultSchema, item, null, { ...place, kind: 'test result' }));
}

/** @throws UsageError  where the value is not what `challenge --json` writes */
export function parseChallengeResult(value: unknown, place: Place): ChallengeResult {
  return checkDocument(challengeResultSchema, value, null, { ...place, kind: 'challenge result' });
}
