/** A curve in one line of text. */

const BLOCKS = ['▁', '▂', '▃', '▄', '▅', '▆', '▇', '█'];

/**
 * One block character per value, from the lowest to the highest value shown; a middle dot where `shown` is 0 or the
 * value is not finite. A curve that varies by less than 1 % of its size is drawn flat.
 */
export function drawSparkline(values: ArrayLike<number>, shown: ArrayLike<number>): string {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  const isShown = (i: number) => shown[i] === 1 && Number.isFinite(values[i]);
  for (let i = 0; i < values.length; i++) {
    if (!isShown(i)) continue;
    low = Math.min(low, values[i] ?? 0);
    high = Math.max(high, values[i] ?? 0);
  }
  const isFlat = high - low <= 0.01 * Math.max(Math.abs(low), Math.abs(high));
  let text = '';
  for (let i = 0; i < values.length; i++) {
    const level = isFlat ? 3 : Math.min(7, Math.floor((((values[i] ?? 0) - low) / (high - low)) * 8));
    text += isShown(i) ? BLOCKS[level] : '·';
  }
  return text;
}
