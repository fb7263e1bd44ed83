/** The JSON Schemas that are published with the package, made from the schemas the program itself checks with. */

import { z } from 'zod';
import { fitSchema } from './FitDocument.js';
import { scenarioSchema } from './Scenario.js';
import { studySchema } from './Study.js';

export type DocumentName = 'study' | 'fit' | 'scenario';

const PUBLISHED: Readonly<Record<DocumentName, z.ZodType>> = {
  study: studySchema,
  fit: fitSchema,
  scenario: scenarioSchema,
};

/**
 * JSON Schemas (draft 2020-12) by document name. Keys with a default may be left out, as in files written by hand;
 * `$schema` is allowed in a document, for editors.
 */
export function describeDocuments(): Record<DocumentName, Record<string, unknown>> {
  const describe = (name: DocumentName): Record<string, unknown> => {
    const { $schema, properties, ...rest } = z.toJSONSchema(PUBLISHED[name], { io: 'input' });
    return {
      $schema,
      title: `wanderlaw ${name}`,
      ...rest,
      properties: { $schema: { type: 'string' }, ...properties },
    };
  };
  return { study: describe('study'), fit: describe('fit'), scenario: describe('scenario') };
}
