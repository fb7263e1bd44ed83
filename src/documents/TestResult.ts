/** What `test --json` and `challenge --json` print, as far as a report shows it; further keys are left alone. */

import { z } from 'zod';
import { checkDocument, type DocumentPlace } from './checkDocument.js';

const maybeNumber = z.number().nullable();
/** JSON has no infinite numbers: an end without a bound is null there. */
const parametersSchema = z
  .record(
    z.string(),
    z.looseObject({
      value: maybeNumber.transform((value) => value ?? Number.NaN),
      low: maybeNumber.transform((value) => value ?? Number.NEGATIVE_INFINITY),
      high: maybeNumber.transform((value) => value ?? Number.POSITIVE_INFINITY),
    }),
  )
  .default({});

export const testResultSchema = z.looseObject({
  hypothesis: z.string(),
  statistic: maybeNumber,
  p: maybeNumber,
  rejected: z.boolean(),
  parameters: parametersSchema,
  note: z.string(),
  field: z.string().optional(),
  law: z.string().optional(),
  comparison: z
    .array(
      z.looseObject({
        law: z.string(),
        rejected: z.boolean(),
        p: maybeNumber,
        difference: maybeNumber,
        differenceError: maybeNumber,
        tie: z.boolean(),
        parameters: parametersSchema,
      }),
    )
    .optional(),
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
