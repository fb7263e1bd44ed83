/** Drag on a sphere moving towards or away from a flat wall, relative to that far from it: the exact series. */

/**
 * λ with cosh α = h/a, h the height of the centre:
 *
 *   λ = (4/3) sinh α Σ_{n≥1} n(n+1)/((2n−1)(2n+3)) [ (2 sinh((2n+1)α) + (2n+1) sinh 2α) / (4 sinh²((n+½)α) − (2n+1)² sinh²α) − 1 ]
 *
 * Source  Brenner, The slow motion of a sphere through a viscous fluid towards a plane surface, Chem. Eng. Sci. 16 (1961)
 *         242, eq. 2.19; Happel & Brenner, Low Reynolds Number Hydrodynamics (1983), eq. 7-4.34 (from memory).
 *
 * @param height  h/a, > 1
 */
export function perpendicularDrag(height: number): number {
  const alpha = Math.acosh(height);
  const sinh = Math.sinh(alpha);
  let sum = 0;
  for (let n = 1; n < 2000; n++) {
    const odd = 2 * n + 1;
    if (odd * alpha > 300) break; // the bracket is then zero to rounding
    const numerator = 2 * Math.sinh(odd * alpha) + odd * Math.sinh(2 * alpha);
    const denominator = 4 * Math.sinh((n + 0.5) * alpha) ** 2 - (odd * sinh) ** 2;
    const term = ((n * (n + 1)) / ((2 * n - 1) * (2 * n + 3))) * (numerator / denominator - 1);
    sum += term;
    if (Math.abs(term) < 1e-14 * Math.abs(sum)) break;
  }
  return (4 / 3) * sinh * sum;
}
