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

const [FEED, RETURN, QUOTE, HASH] = [10, 13, 34, 35]; // character codes

/** The same with an eye on quotes: they open a cell at its very beginning only, and are doubled inside. */
function cleanQuotedLines(text: string, delimiters: string): string {
  const codes = Array.from(delimiters, (delimiter) => delimiter.charCodeAt(0));
  let cleaned = '';
  let kept = 0; // everything before this place is in `cleaned`
  let place = 0;
  let lineStart = true;
  let cellStart = true;
  while (place < text.length) {
    const code = text.charCodeAt(place);
    if (cellStart && code === QUOTE) {
      place = findClosingQuote(text, place) + 1;
      lineStart = cellStart = false;
    } else if (lineStart && code === HASH) {
      cleaned += text.slice(kept, place);
      while (place < text.length && text.charCodeAt(place) !== FEED && text.charCodeAt(place) !== RETURN)
        place++;
      kept = place;
      lineStart = cellStart = false;
    } else if (code === RETURN) {
      cleaned += text.slice(kept, place);
      kept = place + 1;
      if (text.charCodeAt(kept) !== FEED) cleaned += '\n';
      else place++;
      place++;
      lineStart = cellStart = true;
    } else {
      lineStart = code === FEED;
      cellStart = lineStart || codes.includes(code);
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
