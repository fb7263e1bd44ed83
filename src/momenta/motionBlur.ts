/**
 * Displacement autocovariances of positions that are averaged over an exposure (motion blur).
 *
 * With M(τ) the mean squared displacement of the motion over a time τ, those of snapshots are
 *
 *     c_j = ½ [M(j + 1) + M(j − 1)] − M(j).
 *
 * Two recorded positions are averages over windows of the length E, and the times between the instants in them are spread
 * around j like a triangle; so M is replaced by its average M̃(τ) = ∫ (E − |w|)/E² M(|τ + w|) dw, the integral from −E to E.
 *
 * Source  Savin & Doyle, Static and dynamic errors in particle tracking microrheology, Biophys. J. 88 (2005) 623 (mean
 *         squared displacement under exposure); for diffusion c_0 = 2D(1 − E/3) and c_1 = DE/3: Berglund, Statistics of
 *         camera-based single-particle tracking, Phys. Rev. E 82 (2010) 011917.
 */

/** Gauss–Legendre quadrature on (0, 1), exact to 1e-9 for a decay of twelve e-foldings over it (e.g. Abramowitz & Stegun, table 25.4). */
const NODES = [
  0.013046735741414128, 0.06746831665550773, 0.16029521585048778, 0.2833023029353764, 0.4255628305091844,
  0.5744371694908156, 0.7166976970646236, 0.8397047841495122, 0.9325316833444923, 0.9869532642585859,
];
const WEIGHTS = [
  0.03333567215434407, 0.0747256745752902, 0.109543181257991, 0.13463335965499826, 0.1477621123573764,
  0.1477621123573764, 0.13463335965499826, 0.109543181257991, 0.0747256745752902, 0.03333567215434407,
];

/**
 * Writes c_0 … c_L of blurred positions.
 *
 * @param spread  mean squared displacement M over a time in intervals, length²
 * @param exposure  E in intervals, above 0 and at most 1
 * @param out  length L + 1
 */
export function blurredCovariancesInto(
  spread: (time: number) => number,
  exposure: number,
  out: Float64Array,
): void {
  const averaged = (time: number): number => {
    let sum = 0;
    for (let i = 0; i < NODES.length; i++) {
      const shift = exposure * NODES[i];
      sum += WEIGHTS[i] * (1 - NODES[i]) * (spread(time + shift) + spread(Math.abs(time - shift)));
    }
    return sum;
  };
  let here = averaged(0);
  let after = averaged(1);
  let before = after;
  for (let lag = 0; lag < out.length; lag++) {
    out[lag] = (before + after) / 2 - here;
    before = here;
    here = after;
    after = averaged(lag + 2);
  }
}
