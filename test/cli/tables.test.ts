import { describe, expect, it } from 'vitest';
import { formatTable } from '../../src/cli/tables.js';

describe('a result table', () => {
  it('keeps numbers to the last bit and quotes names that need it', () => {
    const text = [
      ...formatTable([
        { name: 'track', values: ['a,b', 'c "d"', '#e'] },
        { name: 'x', values: Float64Array.of(0.1 + 0.2, Number.NaN, -1e-300) },
      ]),
    ].join('');
    expect(text).toBe('track,x\n"a,b",0.30000000000000004\n"c ""d""",NaN\n"#e",-1e-300\n');
  });

  it('loses no row where it is cut into pieces', () => {
    const values = Array.from({ length: 10_000 }, (_, i) => i);
    const lines = [...formatTable([{ name: 'i', values }])].join('').trim().split('\n');
    expect(lines).toEqual(['i', ...values.map(String)]);
  });
});
