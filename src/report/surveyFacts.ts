/** Careful reading of the survey kept in a fit file, which holds free-form JSON. */

import type { Warning } from '../errors.js';

type Facts = Readonly<Record<string, unknown>>;

/** A finite number of that name, or null. */
export function readNumber(facts: Facts, name: string): number | null {
  const value = facts[name];
  return typeof value === 'number' && Number.isFinite(value) ? value : null;
}

/** A text of that name, or null. */
export function readText(facts: Facts, name: string): string | null {
  const value = facts[name];
  return typeof value === 'string' ? value : null;
}

/** The finite numbers of a list; entries may be numbers or objects with a `value`. */
export function readNumbers(facts: Facts, name: string): number[] {
  const list = facts[name];
  if (!Array.isArray(list)) return [];
  return list
    .map((entry: unknown) => (isFacts(entry) ? entry.value : entry))
    .filter((entry): entry is number => typeof entry === 'number' && Number.isFinite(entry));
}

/** Warnings listed under `warnings`. */
export function readWarnings(facts: Facts): Warning[] {
  const list = facts.warnings;
  if (!Array.isArray(list)) return [];
  return list.flatMap((entry: unknown) => {
    if (!isFacts(entry)) return [];
    const [code, message] = [readText(entry, 'code'), readText(entry, 'message')];
    return message === null ? [] : [{ code: code ?? '', message }];
  });
}

/** Warnings of several sources without repetition. */
export function mergeWarnings(...lists: readonly (readonly Warning[])[]): Warning[] {
  const seen = new Set<string>();
  return lists.flat().filter((warning) => {
    const key = `${warning.code}\n${warning.message}`;
    if (seen.has(key)) return false;
    seen.add(key);
    return true;
  });
}

export function isFacts(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}
