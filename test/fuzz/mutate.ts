/** Seeded damage to files: in their text, and in the structure of their JSON. */

import type { RandomStream } from '../../src/numerics/random/RandomStream.js';

const TOKENS = [
  'NaN',
  'inf',
  '-',
  '+',
  '.',
  ',',
  ';',
  '\t',
  '|',
  '"',
  '""',
  "'",
  '\n',
  '\r',
  '\r\n',
  '#',
  '\0',
  ' ',
  '1e999',
  '-1e-400',
  '1,5',
  '0x10',
  '1_000',
  '9'.repeat(400),
  '-0',
  'null',
  'true',
  '{}',
  '[]',
  '{',
  '}',
  '[',
  ']',
  ':',
  '__proto__',
  'constructor',
  'é',
  '\u2028',
  '\ud800',
  '\ufeff',
  '😀',
  '(',
  ')',
  '^',
  '*',
  '/',
  'x',
  'sin',
  'e',
  '=',
  '==',
  '?',
  '!',
  '%',
  '\\',
  '((((((((((((((((((((((((((((((((',
  'a'.repeat(5000),
  '1e308',
  '-1e308',
  '5e-324',
  '2147483648',
  '-1',
  '0',
  '1e15',
]; // prettier-ignore

const VALUES: readonly unknown[] = [
  null,
  true,
  false,
  0,
  -1,
  1,
  0.5,
  1e308,
  -1e308,
  5e-324,
  1e15,
  2 ** 31,
  2 ** 53,
  '',
  'x',
  'NaN',
  'constant',
  'spline:8',
  'spline:999999999',
  'polynomial:40',
  '../../x',
  '\0',
  '__proto__',
  [],
  [[]],
  {},
  { x: 1 },
  [null],
  [1, 2, 3],
  ['a'],
  'second',
  'first',
  'auto',
  'a'.repeat(5000),
  [1e308, 1e308],
  [-1, -1],
]; // prettier-ignore

const pick = <Item>(items: readonly Item[], stream: RandomStream): Item =>
  items[stream.integer(items.length)];

/** A text with one to five wounds. */
export function damageText(text: string, stream: RandomStream): string {
  let damaged = text;
  for (let wounds = 1 + stream.integer(5); wounds > 0; wounds--) damaged = wound(damaged, stream);
  return damaged;
}

function wound(text: string, stream: RandomStream): string {
  const at = stream.integer(text.length + 1);
  const length = stream.integer(Math.min(40, text.length) + 1);
  const [before, inside, after] = [text.slice(0, at), text.slice(at, at + length), text.slice(at + length)];
  switch (stream.integer(8)) {
    case 0:
      return before + after;
    case 1:
      return before + inside + inside + after;
    case 2:
      return before + pick(TOKENS, stream) + after;
    case 3:
      return before + pick(TOKENS, stream) + inside + after;
    case 4:
      return before + String.fromCharCode(stream.integer(256)) + text.slice(at + 1);
    case 5:
      return text.slice(0, at);
    case 6: {
      const lines = text.split('\n');
      const [one, other] = [stream.integer(lines.length), stream.integer(lines.length)];
      [lines[one], lines[other]] = [lines[other], lines[one]];
      return lines.join('\n');
    }
    default: {
      // A whole cell or value: what stands between two separators.
      const separators = /[,;\t\n[\]{}:]/;
      const start = before.split('').findLastIndex((character) => separators.test(character)) + 1;
      const rest = text.slice(at).search(separators);
      return text.slice(0, start) + pick(TOKENS, stream) + (rest < 0 ? '' : text.slice(at + rest));
    }
  }
}

/** Bytes of a text, now and then with bytes that are no text. */
export function damageBytes(text: string, stream: RandomStream): Uint8Array {
  const bytes = new TextEncoder().encode(damageText(text, stream));
  if (bytes.length > 0 && stream.integer(5) === 0) bytes[stream.integer(bytes.length)] = stream.integer(256);
  return bytes;
}

/** A copy of a JSON value in which one to three parts are replaced, left out, repeated or put elsewhere. */
export function damageValue(value: unknown, stream: RandomStream): unknown {
  const copy = structuredClone(value);
  const holder = { root: copy };
  for (let wounds = 1 + stream.integer(3); wounds > 0; wounds--) woundValue(holder, stream);
  return holder.root;
}

function woundValue(holder: { root: unknown }, stream: RandomStream): void {
  let parent = holder as unknown as Record<string, unknown>;
  let key = 'root';
  for (let depth = stream.integer(8); depth > 0; depth--) {
    const child = parent[key];
    if (typeof child !== 'object' || child === null) break;
    const keys = Object.keys(child);
    if (keys.length === 0) break;
    parent = child as Record<string, unknown>;
    key = pick(keys, stream);
  }
  const current = parent[key];
  switch (stream.integer(5)) {
    case 0:
      if (Array.isArray(parent)) parent.splice(Number(key), 1);
      else Reflect.deleteProperty(parent, key);
      break;
    case 1:
      if (Array.isArray(parent)) parent.splice(Number(key), 0, structuredClone(current));
      else parent[`${key}2`] = structuredClone(current);
      break;
    case 2:
      parent[key] =
        typeof current === 'number' ? pick([-current, 0, current * 1e300, current + 0.5], stream) : [current];
      break;
    default:
      parent[key] = structuredClone(pick(VALUES, stream));
  }
}
