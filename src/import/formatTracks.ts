/** The track store to a track table that `importTracks` reads back to the last bit. */

import { countTracks, type TrackSet } from '../tracks/TrackSet.js';

const ROWS_PER_CHUNK = 4096;

/**
 * The table in chunks of whole lines: `track,time,x[,y,z][,type][,error_x…]`, comma-separated, LF, header first.
 *
 * Numbers are written with the fewest digits that give the same double precision number again. Names are quoted
 * where they need it. Coordinates of periodic axes are written unwrapped.
 *
 * @example
 * const [header] = [...formatTrackTable(tracks)].join('').split('\n');
 * console.log(header); // → track,time,x
 */
export function* formatTrackTable(tracks: TrackSet): Generator<string> {
  const { dimensions, coordinates, times, positions, trackOffsets, trackNames, trackTypes } = tracks;
  const errors = tracks.localizationErrors;
  const names = ['track', 'time', ...coordinates];
  if (trackTypes !== null) names.push('type');
  if (errors !== null) names.push(...coordinates.map((axis) => `error_${axis}`));
  let chunk = `${names.join(',')}\n`;
  for (let track = 0; track < countTracks(tracks); track++) {
    const name = quoteField(trackNames[track]);
    const type = trackTypes === null ? '' : `,${quoteField(trackTypes[track])}`;
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1]; row++) {
      let line = `${name},${formatExactly(times[row])}`;
      for (let axis = 0; axis < dimensions; axis++)
        line += `,${formatExactly(positions[row * dimensions + axis])}`;
      line += type;
      if (errors !== null) {
        for (let axis = 0; axis < dimensions; axis++)
          line += `,${formatExactly(errors[row * dimensions + axis])}`;
      }
      chunk += `${line}\n`;
      if (row % ROWS_PER_CHUNK === ROWS_PER_CHUNK - 1) {
        yield chunk;
        chunk = '';
      }
    }
  }
  if (chunk !== '') yield chunk;
}

/** Shortest decimal form; unlike String it keeps the sign of zero. */
function formatExactly(value: number): string {
  return Object.is(value, -0) ? '-0' : String(value);
}

/** A text as a cell: in quotes where it holds delimiters, quotes, line breaks or outer blanks, or would be a comment. */
function quoteField(text: string): string {
  return /[",;|\t\r\n]|^\s|\s$|^#/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
