/**
 * Residence and first-passage times, as a recording shows them: from frame to frame, so that a visit between two frames
 * goes unseen, in the recording and in the simulated ones alike.
 *
 * A stay in a region lasts from its first frame inside to the first frame outside. A passage from A to B lasts from the
 * first frame in A (since the track began, or was last in B) to the first frame in B. Times cut off by the end of a track
 * count towards the time at risk; the mean time is the time at risk over the number of ends seen, the
 * maximum-likelihood estimate for exponential times (Kalbfleisch & Prentice, The Statistical Analysis of Failure Time
 * Data, 2002, ch. 3).
 */

import type { TrackSet } from '../tracks/TrackSet.js';
import type { Region } from './Region.js';

/** One kind of time that is measured. */
export interface PassageKind {
  /** `residence-time:left`, `first-passage-time:left-right`. */
  readonly name: string;
  readonly title: string;
  /** Number of the region it begins in, and of the one it ends in; null: it ends by leaving. */
  readonly from: number;
  readonly to: number | null;
}

export interface PassagePlan {
  readonly regions: readonly Region[];
  readonly periods: readonly number[];
  readonly trackOffsets: Int32Array;
  readonly times: Float64Array;
  readonly kinds: readonly PassageKind[];
  /** Per kind, times beyond which the share of longer ones is measured. */
  readonly levels: readonly (readonly number[])[];
}

/** Times of one kind in one recording. */
export interface PassageTimes {
  /** Lengths seen, cut off or not. */
  readonly lengths: readonly number[];
  readonly ended: number;
  readonly atRisk: number;
}

/** Numbers per kind: ends per time at risk, and the share of times beyond each level. */
export const PASSAGE_LEVELS = 8;
export const PASSAGE_FEATURES = 1 + PASSAGE_LEVELS;

/** Plans the times between regions; the levels are quantiles of what was recorded. */
export function planPassages(tracks: TrackSet, regions: readonly Region[]): PassagePlan {
  const kinds: PassageKind[] = regions.map(({ name }, index) => ({
    name: `residence-time:${name}`,
    title: `time spent in ${name} at a stretch`,
    from: index,
    to: null,
  }));
  regions.forEach((from, a) => {
    regions.forEach((to, b) => {
      if (a === b) return;
      kinds.push({
        name: `first-passage-time:${from.name}-${to.name}`,
        title: `time from ${from.name} until ${to.name} is first reached`,
        from: a,
        to: b,
      });
    });
  });
  const bare = {
    regions,
    periods: tracks.periods,
    trackOffsets: tracks.trackOffsets,
    times: tracks.times,
    kinds,
  };
  const levels = collectPassages({ ...bare, levels: [] }, tracks.positions).map(({ lengths }) => {
    const sorted = [...lengths].sort((a, b) => a - b);
    return Array.from({ length: PASSAGE_LEVELS }, (_, i) =>
      sorted.length === 0 ? 0 : sorted[Math.floor(((i + 0.5) / PASSAGE_LEVELS) * sorted.length)],
    );
  });
  return { ...bare, levels };
}

/**
 * @param positions  shape (n, d), unwrapped, at the rows of the recording
 * @returns one entry per kind
 */
export function collectPassages(plan: PassagePlan, positions: Float64Array): PassageTimes[] {
  const { regions, kinds, trackOffsets, times } = plan;
  const found = kinds.map(() => ({ lengths: [] as number[], ended: 0, atRisk: 0 }));
  const inside = new Uint8Array(regions.length);
  const began = new Float64Array(kinds.length); // NaN: no clock is running
  const close = (kind: number, time: number, hasEnded: boolean): void => {
    const length = time - began[kind];
    found[kind].atRisk += length;
    if (hasEnded) found[kind].ended++;
    if (length > 0) found[kind].lengths.push(length);
    began[kind] = Number.NaN;
  };
  for (let track = 0; track + 1 < trackOffsets.length; track++) {
    began.fill(Number.NaN);
    const end = trackOffsets[track + 1];
    for (let row = trackOffsets[track]; row < end; row++) {
      for (let region = 0; region < regions.length; region++) {
        inside[region] = holds(regions[region], plan.periods, positions, row) ? 1 : 0;
      }
      kinds.forEach(({ from, to }, kind) => {
        const isRunning = !Number.isNaN(began[kind]);
        const ends = to === null ? inside[from] === 0 : inside[to] === 1;
        if (isRunning && ends) close(kind, times[row], true);
        else if (!isRunning && inside[from] === 1 && !ends) began[kind] = times[row];
      });
    }
    kinds.forEach((_, kind) => {
      if (end > trackOffsets[track] && !Number.isNaN(began[kind])) close(kind, times[end - 1], false);
    });
  }
  return found;
}

/** Writes `PASSAGE_FEATURES` numbers per kind from `offset` on; NaN where no time of a kind was seen. */
export function measurePassages(
  plan: PassagePlan,
  positions: Float64Array,
  out: Float64Array,
  offset: number,
): void {
  collectPassages(plan, positions).forEach(({ lengths, ended, atRisk }, kind) => {
    const at = offset + kind * PASSAGE_FEATURES;
    out[at] = ended / atRisk; // 0/0: never there
    plan.levels[kind].forEach((level, i) => {
      let longer = 0;
      for (const length of lengths) if (length > level) longer++;
      out[at + 1 + i] = longer / lengths.length;
    });
  });
}

function holds(
  { low, high }: Region,
  periods: readonly number[],
  positions: Float64Array,
  row: number,
): boolean {
  const d = low.length;
  for (let axis = 0; axis < d; axis++) {
    let x = positions[row * d + axis];
    const period = periods[axis];
    if (period > 0) x -= Math.floor(x / period) * period;
    if (!(x >= low[axis] && x < high[axis])) return false;
  }
  return true;
}
