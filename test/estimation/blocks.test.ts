import { describe, expect, it } from 'vitest';
import { canonicalOrder, partitionBlocks } from '../../src/estimation/blocks.js';
import { countPositions } from '../../src/tracks/TrackSet.js';
import { selectTracks } from '../../src/tracks/usableTracks.js';
import { simulateFirstOrder } from '../support/exactProcesses.js';

function sizesOf(ofPosition: Int32Array, count: number): number[] {
  const sizes = new Array<number>(count).fill(0);
  for (let row = 0; row < ofPosition.length; row++) sizes[ofPosition[row]]++;
  return sizes;
}

describe('blocks', () => {
  it('hold every position once and none is empty', () => {
    for (const [tracks, frames] of [
      [1, 4000],
      [5, 700],
      [29, 40],
      [30, 40],
      [150, 12],
    ]) {
      const recording = simulateFirstOrder({ tracks, frames, lostFrames: 0.1, seed: 3 });
      const blocks = partitionBlocks(recording, 2);
      expect(blocks.ofPosition).toHaveLength(countPositions(recording));
      const sizes = sizesOf(blocks.ofPosition, blocks.count);
      expect(sizes.reduce((sum, size) => sum + size, 0)).toBe(countPositions(recording));
      expect(Math.min(...sizes)).toBeGreaterThan(0);
      expect(blocks.count).toBeLessThanOrEqual(100);
    }
  });

  it('are whole tracks where there are many, dealt out evenly', () => {
    const recording = simulateFirstOrder({ tracks: 250, frames: 30, lostFrames: 0.3, seed: 1 });
    const { kind, count, ofPosition } = partitionBlocks(recording, 1, 60);
    expect([kind, count]).toEqual(['tracks', 60]);
    const { trackOffsets } = recording;
    for (let track = 0; track < 250; track++) {
      const rows = ofPosition.subarray(trackOffsets[track], trackOffsets[track + 1]);
      expect(rows.every((block) => block === rows[0])).toBe(true);
    }
    const sizes = sizesOf(ofPosition, count);
    // greedy dealing, longest first, ends within one track of even
    expect(Math.max(...sizes) - Math.min(...sizes)).toBeLessThanOrEqual(30);
  });

  it('are contiguous stretches of at least twenty memories where tracks are few and long', () => {
    for (const memory of [0.5, 4, 12]) {
      const recording = simulateFirstOrder({ tracks: 4, frames: 3000, interval: 0.5, seed: 2 });
      const { kind, count, ofPosition } = partitionBlocks(recording, memory);
      expect(kind).toBe('stretches');
      const sizes = sizesOf(ofPosition, count);
      // rounding to a whole number of pieces per track shortens a stretch by a third at most
      expect(Math.min(...sizes) * 0.5).toBeGreaterThanOrEqual(20 * memory * (2 / 3));
      for (let track = 0; track < 4; track++) {
        for (let row = track * 3000 + 1; row < (track + 1) * 3000; row++) {
          expect(
            ofPosition[row] - ofPosition[row - 1] === 0 || ofPosition[row] - ofPosition[row - 1] === 1,
          ).toBe(true);
        }
      }
      const owners = new Set(Array.from(ofPosition, (block, row) => `${block} ${Math.floor(row / 3000)}`));
      expect(owners.size).toBe(count); // no stretch spans two tracks
    }
  });

  it('follow the tracks into any other order', () => {
    for (const tracks of [7, 64]) {
      const recording = simulateFirstOrder({ tracks, frames: 50, lostFrames: 0.2, seed: 9 });
      const order = Array.from({ length: tracks }, (_, i) => (i * 5 + 3) % tracks);
      const shuffled = selectTracks(recording, order);
      expect(Array.from(canonicalOrder(shuffled), (track) => order[track])).toEqual(
        canonicalOrder(recording),
      );
      const before = partitionBlocks(recording, 1, 20);
      const after = partitionBlocks(shuffled, 1, 20);
      order.forEach((track, place) => {
        expect(after.ofPosition[shuffled.trackOffsets[place]]).toBe(
          before.ofPosition[recording.trackOffsets[track]],
        );
      });
    }
  });
});
