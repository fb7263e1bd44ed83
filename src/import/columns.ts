/** Which column of a table plays which role: by name, or by the mapping of `--columns`. */

import { UsageError } from '../errors.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import { suggestName } from '../numerics/text/suggestName.js';
import { quoteCell, tableError } from './tableError.js';

/** Everything a column can mean. Errors are standard deviations of the localization error, per axis. */
export const COLUMN_ROLES = [
  'track',
  'time',
  'frame',
  'x',
  'y',
  'z',
  'type',
  'error_x',
  'error_y',
  'error_z',
  'concentration',
] as const;

export type ColumnRole = (typeof COLUMN_ROLES)[number];

/** Places of the columns in a row, counted from 0; −1 where the table has none. */
export interface TableColumns {
  /** Header cells without surrounding blanks. */
  readonly names: readonly string[];
  readonly track: number;
  readonly time: number;
  /** Whether the time column counts frames. */
  readonly countsFrames: boolean;
  readonly type: number;
  /** Length d: the columns of x, y, z. */
  readonly coordinates: readonly number[];
  /** Length d, or null where the table has no error columns. */
  readonly errors: readonly number[] | null;
  /** Read only where `--columns` names it, since nothing but laws of friction looks at it. */
  readonly concentration: number;
  /** Coordinate columns left out because `--columns` names others. */
  readonly leftOut: readonly string[];
  /** Columns without a role whose names are close to those of roles that no column has: slips, perhaps. */
  readonly nearMisses: readonly NearMiss[];
}

/**
 * Checks a mapping of roles to column names before any file is read.
 *
 * @throws UsageError  unknown role, empty name, or both time and frame
 */
export function checkColumnMapping(mapping: Readonly<Record<string, string>>): void {
  for (const [role, name] of Object.entries(mapping)) {
    if (!(COLUMN_ROLES as readonly string[]).includes(role)) {
      const suggestion = suggestName(role, COLUMN_ROLES);
      const hint = suggestion === null ? '' : `; did you mean ${suggestion}?`;
      throw new UsageError(
        `--columns: ${quoteCell(role)} is not a role${hint} (${COLUMN_ROLES.join(', ')})`,
        {
          option: 'columns',
          role,
        },
      );
    }
    if (name === '') {
      throw new UsageError(`--columns: ${role} needs the name of a column, as in ${role}=NAME`, {
        option: 'columns',
        role,
      });
    }
  }
  if (mapping.time !== undefined && mapping.frame !== undefined) {
    throw new UsageError(
      '--columns names both time and frame; name the one that says when a position was taken',
      {
        option: 'columns',
      },
    );
  }
}

/**
 * Finds the columns. Names are compared without surrounding blanks, first exactly, then in any case. A table with
 * both `time` and `frame` is read by its time. Where the mapping names coordinates, those are all the coordinates.
 *
 * @throws DataError  a needed or mapped column is missing or there twice, y without x, errors for some axes only
 */
export function findColumns(
  header: readonly string[],
  mapping: Readonly<Record<string, string>>,
  file: string,
  line: number,
): TableColumns {
  const names = header.map((name) => name.trim());
  if (names.every((name) => name !== '' && Number.isFinite(Number(name)))) {
    throw tableError(
      { file, line },
      'the line holds numbers where a header line that names the columns is needed (lines that begin with # are comments)',
    );
  }
  const place = (role: ColumnRole): number => findColumn(names, role, mapping, file, line);

  const countsFrames = mapping.time === undefined && (mapping.frame !== undefined || place('time') === -1);
  const time = place(countsFrames ? 'frame' : 'time');
  if (time === -1) throw missingError(names, 'time', 'time or frame', file, line);

  const mapped = COORDINATE_NAMES.filter((axis) => mapping[axis] !== undefined);
  const found = COORDINATE_NAMES.filter((axis) => place(axis) !== -1);
  const axes = mapped.length > 0 ? mapped : found;
  for (let i = 0; i < Math.max(1, axes.length); i++) {
    const needed = COORDINATE_NAMES[i];
    if (axes[i] !== needed) throw missingError(names, needed, needed, file, line, axes.slice(i));
  }

  const track = place('track');
  const type = place('type');
  const errors = axes.map((axis) => place(`error_${axis}`));
  const missing = errors.indexOf(-1);
  if (missing !== -1 && errors.some((column) => column !== -1)) {
    const axis = axes[missing];
    throw tableError(
      { file, line },
      `there are error columns, but none for ${axis}; add error_${axis} or leave out the others`,
      { role: `error_${axis}` },
    );
  }
  const coordinates = axes.map(place);
  const concentration = mapping.concentration === undefined ? -1 : place('concentration');
  const used = [track, time, type, ...coordinates, ...errors, concentration].filter(
    (column) => column !== -1,
  );
  const twice = used.find((column, i) => used.indexOf(column) !== i);
  if (twice !== undefined) {
    throw new UsageError(
      `--columns gives column ${quoteCell(names[twice])} two roles; name another for one of them`,
      {
        option: 'columns',
        column: names[twice],
      },
    );
  }
  return {
    names,
    track,
    time,
    countsFrames,
    type,
    coordinates,
    errors: missing === -1 ? errors : null,
    concentration,
    nearMisses: findNearMisses(names, used, [
      ...(track === -1 ? ['track'] : []),
      ...(type === -1 ? ['type'] : []),
      ...(missing === -1 ? [] : axes.map((axis) => `error_${axis}`)),
    ]),
    leftOut: found.filter((axis) => !axes.includes(axis) && !coordinates.includes(place(axis))),
  };
}

export interface NearMiss {
  readonly role: string;
  readonly column: string;
}

function findNearMisses(
  names: readonly string[],
  used: readonly number[],
  openRoles: readonly string[],
): NearMiss[] {
  const idle = names.filter((name, place) => name !== '' && !used.includes(place));
  const misses = new Map<string, NearMiss>(); // a column is offered for one role
  for (const role of openRoles) {
    const column = suggestName(role, idle) ?? idle.find((name) => holdsWord(name, role));
    if (column !== undefined && !misses.has(column)) misses.set(column, { role, column });
  }
  return [...misses.values()];
}

/** As it is typed after `--columns`. */
export function writeMapping({ role, column }: NearMiss): string {
  return `${role}=${/[\s,]/.test(column) ? `"${column}"` : column}`;
}

function findColumn(
  names: readonly string[],
  role: ColumnRole,
  mapping: Readonly<Record<string, string>>,
  file: string,
  line: number,
): number {
  const wanted = (mapping[role] ?? role).trim();
  let places = placesOf(names, (name) => name === wanted);
  if (places.length === 0) places = placesOf(names, (name) => name.toLowerCase() === wanted.toLowerCase());
  if (places.length > 1) {
    throw tableError(
      { file, line, column: wanted },
      `${places.length} columns have this name; rename all but one, or name another with --columns ${role}=NAME`,
    );
  }
  if (places.length === 1) return places[0];
  if (mapping[role] === undefined) return -1;
  const taken = Object.values(mapping);
  const free = names.filter((name) => !taken.includes(name));
  const suggestion = suggestName(wanted, free);
  const hint = suggestion === null ? '; name one that is there' : `; did you mean ${quoteCell(suggestion)}?`;
  throw tableError(
    { file, line },
    `there is no column ${quoteCell(wanted)} for ${role}${hint} (${listNames(names)})`,
    {
      role,
      missing: wanted,
      columns: names,
    },
  );
}

function placesOf(names: readonly string[], accept: (name: string) => boolean): number[] {
  return names.flatMap((name, place) => (accept(name) ? [place] : []));
}

/** @param present  later axes that were found although this one was not */
function missingError(
  names: readonly string[],
  role: ColumnRole,
  wanted: string,
  file: string,
  line: number,
  present: readonly string[] = [],
): Error {
  const although = present.length === 0 ? '' : ` although there is ${present.join(' and ')}`;
  const suggestion = suggestName(role, names) ?? names.find((name) => holdsWord(name, role));
  const example = writeMapping({ role, column: suggestion ?? 'NAME' });
  return tableError(
    { file, line },
    `there is no column ${wanted}${although}; rename one or say --columns ${example} (${listNames(names)})`,
    { role, columns: names },
  );
}

/** `x (µm)`, `x_um`, `position x`: the role as a word of its own. */
function holdsWord(name: string, role: string): boolean {
  const words = name.toLowerCase().split(/[^\p{L}\p{N}]+/u);
  return words.includes(role);
}

const LISTED_NAMES = 20;

function listNames(names: readonly string[]): string {
  const shown = names.slice(0, LISTED_NAMES).map(quoteCell).join(', ');
  const more = names.length > LISTED_NAMES ? `, and ${names.length - LISTED_NAMES} more` : '';
  return names.length === 1
    ? `the only column is ${shown}; cells are separated by commas, semicolons or tabs`
    : `columns: ${shown}${more}`;
}
