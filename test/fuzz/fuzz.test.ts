import { describe, expect, it } from 'vitest';
import { fuzzTarget } from './fuzzTarget.js';
import { createTargets } from './targets.js';

describe('a thousand damaged files and formulas', () => {
  it('are read or refused in one sentence', async () => {
    for (const target of await createTargets()) {
      const { accepted, refused, faults } = await fuzzTarget(target, 200, 7);
      expect(faults).toEqual([]);
      expect(accepted + refused).toBe(200);
      expect(refused, target.name).toBeGreaterThan(20); // the damage is real
    }
  }, 60_000);
});
