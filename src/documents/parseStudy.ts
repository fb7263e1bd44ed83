/** Reading a study: the JSON of `--study FILE`, every key optional. */

import { checkDocument, type DocumentPlace } from './checkDocument.js';
import { studySchema, type Study, type StudyInput } from './Study.js';

/**
 * A study as written, without the defaults filled in.
 *
 * @throws UsageError  naming the first unknown key or wrong value
 */
export function parseStudyInput(value: unknown, place: Omit<DocumentPlace, 'kind'>): StudyInput {
  checkDocument(studySchema, value, null, { ...place, kind: 'study' });
  return value as StudyInput;
}

/** The resolved study: what is left out takes its default. */
export function completeStudy(input: StudyInput): Study {
  return studySchema.parse(input);
}
