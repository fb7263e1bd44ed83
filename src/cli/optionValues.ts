/** From the text of an option to its value, with a sentence for every way it can be wrong. */

import { UsageError } from '../errors.js';
import { checkColumnMapping, COLUMN_ROLES } from '../import/columns.js';
import { formatSuggestion } from './suggest.js';

/** Reads the text given to an option; `option` is its name as typed, for the sentence. */
export type ParseValue = (text: string, option: string) => unknown;

export interface NumberRange {
  readonly whole?: boolean;
  /** Smallest and largest allowed value. */
  readonly from?: number;
  readonly to?: number;
  /** Bounds that are themselves not allowed. */
  readonly above?: number;
  readonly below?: number;
}

/** A reader of numbers within a range. */
export function numberValue(range: NumberRange): (text: string, option: string) => number {
  return (text, option) => {
    const value = /^\s*[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?\s*$/i.test(text) ? Number(text) : NaN;
    const fits =
      Number.isFinite(value) &&
      (!range.whole || Number.isSafeInteger(value)) &&
      value >= (range.from ?? -Infinity) &&
      value <= (range.to ?? Infinity) &&
      value > (range.above ?? -Infinity) &&
      value < (range.below ?? Infinity);
    if (!fits) {
      throw new UsageError(`${option} is ${describeRange(range)}, got "${text}"`, { option, value: text });
    }
    return value;
  };
}

function describeRange(range: NumberRange): string {
  const kind = range.whole ? 'a whole number' : 'a number';
  const parts: string[] = [];
  if (range.from !== undefined && range.to !== undefined) parts.push(`from ${range.from} to ${range.to}`);
  else if (range.from !== undefined) parts.push(`of at least ${range.from}`);
  else if (range.to !== undefined) parts.push(`of at most ${range.to}`);
  if (range.above !== undefined) parts.push(`above ${range.above}`);
  if (range.below !== undefined) parts.push(`below ${range.below}`);
  return [kind, parts.join(' and ')].filter(Boolean).join(' ');
}

/** A reader of one word out of a few. */
export function choiceValue(choices: readonly string[]): (text: string, option: string) => string {
  return (text, option) => {
    if (choices.includes(text)) return text;
    const suggestion = formatSuggestion(text, choices);
    throw new UsageError(
      `${option} "${text}" is not known${suggestion || '; use one of'} (${choices.join(', ')})`,
      { option, value: text, choices },
    );
  };
}

/** The first words a SHAPE may begin with. */
export const SHAPE_WORDS = ['zero', 'constant', 'linear', 'polynomial', 'spline', 'waves', 'law'] as const;

/** A SHAPE: its first word is checked here, its number where the basis is made. */
export function shapeValue(text: string, option: string): string {
  const word = text.split(':')[0].trim();
  if (SHAPE_WORDS.some((known) => known === word)) return text.trim();
  const suggestion = formatSuggestion(word, SHAPE_WORDS);
  throw new UsageError(
    `${option} "${text}" is not a known shape${suggestion || '; use one of'} ` +
      '(zero, constant, linear, polynomial:N, spline, spline:N, waves:N)',
    { option, value: text, choices: [...SHAPE_WORDS] },
  );
}

/** `auto`, or a length that is not negative. */
export function lengthOrAutoValue(text: string, option: string): number | 'auto' {
  if (text === 'auto') return 'auto';
  const value = Number(text);
  if (text.trim() === '' || !Number.isFinite(value) || value < 0) {
    throw new UsageError(`${option} is auto or a length of at least 0, got "${text}"`, {
      option,
      value: text,
    });
  }
  return value;
}

/** `role=name,role=name`; a comma inside a name is kept unless a known role and `=` follow it. */
export function columnsValue(text: string, option: string): Record<string, string> {
  const columns = Object.create(null) as Record<string, string>; // any name may be typed
  const boundary = new RegExp(`,(?=\\s*(?:${COLUMN_ROLES.join('|')})\\s*=)`);
  for (const pair of text.split(boundary)) {
    const at = pair.indexOf('=');
    const role = pair.slice(0, at).trim();
    const name = pair.slice(at + 1).trim();
    if (at < 1 || name === '') {
      throw new UsageError(
        `${option} is ROLE=NAME,…, for example track=ID,time=t,x=PosX, got "${pair.trim()}"`,
        {
          option,
          value: text,
        },
      );
    }
    if (Object.hasOwn(columns, role)) {
      throw new UsageError(`${option} gives the role ${role} twice; keep one of them`, {
        option,
        value: text,
      });
    }
    columns[role] = name;
  }
  checkColumnMapping(columns);
  return { ...columns };
}

/** `LENGTH,TIME`: two labels. */
export function unitsValue(text: string, option: string): { length: string; time: string } {
  const parts = text.split(',').map((part) => part.trim());
  if (parts.length !== 2 || parts.includes('')) {
    throw new UsageError(`${option} is two labels, LENGTH,TIME, for example um,s, got "${text}"`, {
      option,
      value: text,
    });
  }
  return { length: parts[0], time: parts[1] };
}

/** `g0=1,a=0.1`: values of named parameters. */
export function parametersValue(text: string, option: string): Record<string, number> {
  const values = Object.create(null) as Record<string, number>; // any name may be typed
  for (const pair of text.split(',')) {
    const [name, value = '', ...rest] = pair.split('=').map((part) => part.trim());
    if (name === '' || value === '' || rest.length > 0 || !Number.isFinite(Number(value))) {
      throw new UsageError(`${option} is NAME=NUMBER,…, for example g0=1,a=0.1, got "${pair.trim()}"`, {
        option,
        value: text,
      });
    }
    if (Object.hasOwn(values, name)) {
      throw new UsageError(`${option} gives ${name} twice; keep one of them`, { option, value: text });
    }
    values[name] = Number(value);
  }
  return { ...values };
}

/** `4,3`: one period per axis, 0 = open. */
export function periodsValue(text: string, option: string): number[] {
  const periods = text.split(',').map((part) => (part.trim() === '' ? NaN : Number(part)));
  if (periods.length > 3 || periods.some((period) => !Number.isFinite(period) || period < 0)) {
    throw new UsageError(
      `${option} is one length per axis, 0 where the axis is open, for example 4,0, got "${text}"`,
      { option, value: text },
    );
  }
  return periods;
}
