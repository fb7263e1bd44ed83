/** A box in space that the user names, for residence and first-passage times. */

import { UsageError } from '../errors.js';

export interface Region {
  readonly name: string;
  /** Length d each, length units; −∞ and ∞ where a side is open. On periodic axes within one period. */
  readonly low: readonly number[];
  readonly high: readonly number[];
}

/**
 * @throws UsageError  where names repeat, or a region has other dimensions than the tracks
 */
export function checkRegions(regions: readonly Region[], dimensions: number): void {
  const names = new Set<string>();
  for (const { name, low } of regions) {
    if (names.has(name)) {
      throw new UsageError(`--region "${name}" is given twice; give each region a name of its own`, {
        option: '--region',
        name,
      });
    }
    names.add(name);
    if (low.length !== dimensions) {
      throw new UsageError(
        `--region "${name}" has ${low.length} ${low.length === 1 ? 'axis' : 'axes'} but the tracks have ${dimensions}; write one LOW:HIGH per axis`,
        { option: '--region', name, found: low.length, needed: dimensions },
      );
    }
  }
}
