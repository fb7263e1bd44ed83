/**
 * The option table. Each option is described where it is declared: its meaning, its unit, its default, and what its
 * extremes do. `--help` is printed from here.
 *
 * Nothing heavy is imported, so that help appears at once.
 */

import { COMMAND_OPTIONS } from './commandOptions.js';
import { MODEL_OPTIONS } from './modelOptions.js';
import type { OptionSpec } from './OptionSpec.js';
import { columnsValue, numberValue, periodsValue, unitsValue } from './optionValues.js';

export type { OptionSpec };

/** How the table is read. */
const READING_OPTIONS = {
  columns: {
    flags: '--columns <ROLES>',
    meaning:
      'which column plays which role, for example track=ID,time=t,x=PosX; roles: track, time, frame, x, y, z, type, error_x, error_y, error_z',
    default: 'columns named like their roles',
    parse: columnsValue,
    study: 'columns',
  },
  interval: {
    flags: '--interval <T>',
    meaning: 'time between frames, where the table counts frames',
    unit: 'time',
    default: '1 with a frame column',
    parse: numberValue({ above: 0 }),
    study: 'interval',
  },
  lengthScale: {
    flags: '--length-scale <FACTOR>',
    meaning: 'factor from lengths in the table to lengths in the results',
    default: '1',
    parse: numberValue({ above: 0 }),
    study: 'lengthScale',
  },
  timeScale: {
    flags: '--time-scale <FACTOR>',
    meaning: 'factor from times in the table to times in the results',
    default: '1',
    parse: numberValue({ above: 0 }),
    study: 'timeScale',
  },
  units: {
    flags: '--units <LENGTH,TIME>',
    meaning: 'labels of the units of length and time, after scaling, for example um,s',
    default: 'none',
    parse: unitsValue,
    study: 'units',
  },
  period: {
    flags: '--period <LENGTHS>',
    meaning: 'period of each axis, 0 where it is open, for example 4,0; wrapped tracks are unwrapped',
    unit: 'length (after scaling)',
    default: 'all axes open',
    parse: periodsValue,
    study: 'period',
  },
  mass: {
    flags: '--mass <M>',
    meaning: 'mass of the particle, where momenta and forces should carry it',
    unit: 'mass',
    default: 'everything per unit mass',
    parse: numberValue({ above: 0 }),
    study: 'mass',
  },
  skipInvalid: {
    flags: '--skip-invalid',
    meaning: 'leave out and count positions that are not finite numbers',
    default: 'they are refused',
    study: 'skipInvalid',
  },
} as const satisfies Record<string, OptionSpec>;

/** Results and how the program speaks. */
const SPEAKING_OPTIONS = {
  output: {
    flags: '-o, --output <FILE>',
    meaning: 'file the result is written to, whole or not at all; a name ending in .json asks for JSON',
    default: 'standard output',
  },
  json: {
    flags: '--json',
    meaning: 'print one JSON document instead of the table for people',
  },
  quiet: {
    flags: '-q, --quiet',
    meaning: 'no progress, notes or warnings on standard error; errors are still shown',
  },
  trace: {
    flags: '--trace',
    meaning: 'show where in the program an error arose',
  },
  workers: {
    flags: '--workers <N>',
    meaning: 'threads to work with; the result does not depend on it',
    default: 'all cores',
    parse: numberValue({ whole: true, from: 1, to: 256 }),
  },
} as const satisfies Record<string, OptionSpec>;

export const OPTIONS = {
  ...MODEL_OPTIONS,
  ...READING_OPTIONS,
  ...SPEAKING_OPTIONS,
  ...COMMAND_OPTIONS,
} as const satisfies Record<string, OptionSpec>;

export type OptionName = keyof typeof OPTIONS;

/** Options that say how a track table is read. */
export const TABLE_OPTIONS = [
  'study',
  'columns',
  'interval',
  'lengthScale',
  'timeScale',
  'units',
  'period',
  'mass',
  'skipInvalid',
] as const satisfies readonly OptionName[];

/** Options of every command. */
export const SPEECH_OPTIONS = ['json', 'quiet', 'trace'] as const satisfies readonly OptionName[];

/** What `--help` says of an option, from all that is declared. */
export function describeOption(spec: OptionSpec): string {
  const parts = [spec.meaning];
  if (spec.unit !== undefined) parts.push(`unit: ${spec.unit}`);
  if (spec.extremes !== undefined) parts.push(spec.extremes);
  if (spec.default !== undefined) parts.push(`default: ${spec.default}`);
  return parts.join('; ');
}
