/** From JSON of unknown content to a checked document, with one sentence for what is wrong first. */

import type { z } from 'zod';
import { UsageError } from '../errors.js';

export interface DocumentPlace {
  /** What it should be: `fit file`, `study`, `scenario`. */
  readonly kind: string;
  /** Where it came from, as the user wrote it. */
  readonly source: string;
  /** Finds the word a misspelt key was meant to be; the empty string where there is none. */
  readonly suggest?: (word: string, known: readonly string[]) => string;
}

/**
 * @param format  the value the key `format` must have, or null for documents without one
 * @throws UsageError  naming the file and the first place in it that is wrong
 */
export function checkDocument<Schema extends z.ZodType>(
  schema: Schema,
  value: unknown,
  format: string | null,
  place: DocumentPlace,
): z.output<Schema> {
  const { kind, source } = place;
  if (typeof value !== 'object' || value === null || Array.isArray(value)) {
    throw new UsageError(`${source} is not a ${kind}: it holds no JSON object`, { source, kind });
  }
  if (format !== null) {
    const found = (value as { format?: unknown }).format;
    if (found !== format) {
      const seen = typeof found === 'string' ? `its format is "${found}"` : 'it has no format';
      throw new UsageError(`${source} is not a ${kind}: ${seen}, where "${format}" is needed`, {
        source,
        kind,
      });
    }
  }
  const result = schema.safeParse(value);
  if (result.success) return result.data;
  throw new UsageError(`${source}: ${describeIssue(result.error.issues[0], schema, place)}`, {
    source,
    kind,
    at: result.error.issues[0].path.join('.'),
  });
}

function describeIssue(issue: z.core.$ZodIssue, schema: z.ZodType, place: DocumentPlace): string {
  const at = formatPath(issue.path);
  if (issue.code === 'unrecognized_keys') {
    const [key] = issue.keys;
    const known = issue.path.length === 0 && 'shape' in schema ? Object.keys(schema.shape as object) : [];
    const suggestion = place.suggest?.(key, known) ?? '';
    const inside = at === '' ? '' : ` in ${at}`;
    return `"${key}"${inside} is not a key of a ${place.kind}${suggestion || '; remove it'}`;
  }
  if (issue.code === 'invalid_union' && issue.errors.length > 0) {
    // of the alternatives, the one that came furthest says most
    const deepest = issue.errors.flat().sort((a, b) => b.path.length - a.path.length)[0];
    if (deepest !== undefined && deepest.path.length > 0) {
      return describeIssue({ ...deepest, path: [...issue.path, ...deepest.path] }, schema, place);
    }
  }
  const message = issue.message
    .replace(/^Invalid input: expected (.+), received undefined$/, 'is missing; give it as $1')
    .replace(/^Invalid (input|option): /, '');
  return at === '' ? message : `${at}: ${message}`;
}

function formatPath(path: readonly PropertyKey[]): string {
  return path
    .map((part, i) => (typeof part === 'number' ? `[${part}]` : `${i === 0 ? '' : '.'}${String(part)}`))
    .join('');
}
