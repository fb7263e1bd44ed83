/** Line endings made alike and comments emptied, so that one record without quotes is one line of the file. */

/** Delimiters a track table may use, in the order in which they are preferred. */
export const DELIMITERS = ['\t', ';', '|', ','] as const;

export type Delimiter = (typeof DELIMITERS)[number];

/**
 * Turns CR and CRLF into LF and empties comment lines (those that begin with `#`), both only outside quoted cells:
 * what stands between quotes is left as it is. Cleaning twice changes nothing.
 *
 * @param text  whole lines, beginning at the start of a record
 * @param delimiter  null where not known yet: a quote after any of DELIMITERS then opens a cell
 */
export function cleanLines(text: string, delimiter: Delimiter | null): string {
  const hasReturns = text.includes('\r');
  const hasComments = text.includes('#');
  if (!hasReturns && !hasComments) return text;
  if (text.includes('"')) return cleanQuotedLines(text, delimiter ?? DELIMITERS.join(''));
  const lines = hasReturns ? text.replace(/\r\n?/g, '\n') : text;
  return hasComments ? lines.replace(/(^|\n)#[^\n]*/g, '$1') : lines;
}

/** The same with an eye on quotes: they open a cell at its very beginning only, and are doubled inside. */
function cleanQuotedLines(text: string, delimiters: string): string {
  let cleaned = '';
  let kept = 0; // everything before this place is in `cleaned`
  let place = 0;
  let lineStart = true;
  let cellStart = true;
  while (place < text.length) {
    const character = text[place];
    if (lineStart && character === '#') {
      cleaned += text.slice(kept, place);
      while (place < text.length && text[place] !== '\n' && text[place] !== '\r') place++;
      kept = place;
      lineStart = cellStart = false;
    } else if (cellStart && character === '"') {
      place = findClosingQuote(text, place) + 1;
      lineStart = cellStart = false;
    } else if (character === '\r') {
      cleaned += `${text.slice(kept, place)}\n`;
      place += text[place + 1] === '\n' ? 2 : 1;
      kept = place;
      lineStart = cellStart = true;
    } else {
      lineStart = character === '\n';
      cellStart = lineStart || delimiters.includes(character);
      place++;
    }
  }
  return cleaned + text.slice(kept);
}

/** @returns the place of the quote that closes the one at `opening`, or the end of the text where none does */
export function findClosingQuote(text: string, opening: number): number {
  let quote = text.indexOf('"', opening + 1);
  while (quote !== -1 && text[quote + 1] === '"') quote = text.indexOf('"', quote + 2);
  return quote === -1 ? text.length : quote;
}

/** The number of line breaks of any kind inside a cell. */
export function countLineBreaks(cell: string): number {
  return cell.match(/\r\n|\r|\n/g)?.length ?? 0;
}
