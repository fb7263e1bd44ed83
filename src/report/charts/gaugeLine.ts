/** A value on a range, in one line of text. */

/**
 * The range as a bar with the value as a dot on or beside it: `···├───●──┤···`. The bar takes about half of the
 * width; a value far off makes it shorter, so that the dot stays inside.
 *
 * @returns `width` characters, or spaces where a number is not finite
 */
export function drawGaugeLine(value: number, low: number, high: number, width: number): string {
  if (![value, low, high].every(Number.isFinite) || high < low) return ' '.repeat(width);
  const room = (high - low || Math.abs(value) || 1) * 0.5;
  const ends = [Math.min(low - room, value), Math.max(high + room, value)] as const;
  const at = (number: number) => Math.round(((number - ends[0]) / (ends[1] - ends[0])) * (width - 1));
  const [from, to, dot] = [at(low), at(high), at(value)];
  return Array.from({ length: width }, (_, i) => {
    if (i === dot) return '●';
    if (i === from) return '├';
    if (i === to) return '┤';
    return i > from && i < to ? '─' : '·';
  }).join('');
}
