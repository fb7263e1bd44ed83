/** Round numbers for axes and colour classes. */

/** The smallest of 1, 2, 2.5, 5 × 10ⁿ that is at least `step`; 1 where `step` is not positive. */
export function roundStepUp(step: number): number {
  if (!(step > 0) || !Number.isFinite(step)) return 1;
  const base = 10 ** Math.floor(Math.log10(step));
  for (const factor of [1, 2, 2.5, 5, 10]) if (factor * base >= step * (1 - 1e-9)) return factor * base;
  return 10 * base;
}

/** Smallest and largest finite value; null where there is none. */
export function findRange(values: Iterable<number>): { low: number; high: number } | null {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    if (!Number.isFinite(value)) continue;
    if (value < low) low = value;
    if (value > high) high = value;
  }
  return low <= high ? { low, high } : null;
}

const SMALLEST = 1e-290;

/** Edges of at most `count` equal classes with round bounds that cover low … high. */
export function roundClasses(low: number, high: number, count: number): number[] {
  const size = Math.max(Math.abs(low), Math.abs(high)) || 1;
  // A constant still gets a class of its own width, wide enough that round-off does not split it. Below the range of
  // numbers with full precision steps could not be told apart, and everything is zero.
  const span = size < SMALLEST ? 1 : Math.max(high - low, size * 1e-3);
  for (let step = roundStepUp(span / count); ; step = roundStepUp(step * 1.01)) {
    const first = Math.floor(low / step + 1e-9);
    const last = Math.max(first + 1, Math.ceil(high / step - 1e-9));
    if (last - first <= count) {
      return Array.from({ length: last - first + 1 }, (_, i) => Number(((first + i) * step).toPrecision(12)));
    }
  }
}

/** At most `count` classes between 0 and `high` with edges in the ratios 1 : 2 : 5, for counts that differ by orders of size. */
export function steppedClasses(high: number, count: number): number[] {
  const edges: number[] = [];
  let power = Math.max(0, Math.floor(Math.log10(Math.max(1, high))) - count);
  for (let last = 0; last < high; power++) {
    for (const factor of [1, 2, 5]) {
      if (last >= high) break;
      last = factor * 10 ** power;
      edges.push(last);
    }
  }
  return [0, ...edges.slice(-count)];
}

/** Decimals that write every multiple of the step between neighbouring edges exactly. */
export function stepDecimals(edges: readonly number[]): number {
  const step = Math.min(...edges.slice(1).map((edge, i) => edge - (edges[i] ?? 0)), Number.POSITIVE_INFINITY);
  if (!Number.isFinite(step) || step <= 0) return 0;
  for (let decimals = 0; decimals < 10; decimals++) {
    if (Math.abs(step * 10 ** decimals - Math.round(step * 10 ** decimals)) < 1e-6 * 10 ** decimals * step)
      return decimals;
  }
  return 10;
}

/** A tick of an axis: as many decimals as all ticks of the axis need, thin spaces between thousands, a true minus. */
export function formatTick(value: number, _index: number, ticks: readonly number[] = []): string {
  const decimals = ticks.length > 1 ? stepDecimals(ticks) : 0;
  const text = ticks.length > 1 ? value.toFixed(decimals) : String(value);
  const [whole = '', fraction] = text.replace('-', '−').split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+(?!\d))/g, '\u202f') : whole;
  return fraction === undefined ? grouped : `${grouped}.${fraction}`;
}
