/**
 * The exact Gaussian transition of position and velocity over one interval of length h, per axis, for friction Γ,
 * force F − K(q − q₀) and noise N that are frozen over it:
 *
 *     u' = A u + F c,   Cov u' = A P Aᵀ + N Q,   u = (q − q₀, v).
 *
 * Free motion (K = 0) has the closed forms of Uhlenbeck & Ornstein; with a force slope the same linear equations are
 * summed as power series in h, which is exact to rounding for the short intervals used here.
 *
 * Source  Uhlenbeck & Ornstein, On the theory of the Brownian motion, Phys. Rev. 36 (1930) 823;
 *         Chandrasekhar, Stochastic problems in physics and astronomy, Rev. Mod. Phys. 15 (1943) 1, ch. II.
 */

/** Slots of a transition: A_qq, A_qv, A_vq, A_vv, c_q, c_v, then Q_qq, Q_qv, Q_vv per unit of noise. */
export const TRANSITION_SIZE = 9;

/** Slots of its slopes along friction: A_qv, A_vv, c_q, then Q_qq, Q_qv, Q_vv. c_v has the slope of A_qv. */
export const SLOPE_SIZE = 6;

const SMALL = 0.02; // Γh below which the closed forms lose digits to cancellation
const SERIES_LIMIT = 0.6; // Γh (and √(Kh²)) up to which the series of at most 14 terms is good to 1e-9
const NEGLIGIBLE = 1e-7; // Kh² that changes nothing that could be measured

/**
 * Writes the transition.
 *
 * @param friction  Γ, 1/time, ≥ 0
 * @param slope  K = −∂F/∂q, 1/time²; left out where Γh is beyond what the series reaches
 * @param h  time, > 0
 * @param at  where in `out` the slots start
 */
export function transitionInto(friction: number, slope: number, h: number, out: Float64Array, at = 0): void {
  const x = friction * h;
  const k = slope * h * h;
  if ((k > NEGLIGIBLE || k < -NEGLIGIBLE || x < SMALL) && x <= SERIES_LIMIT) seriesInto(x, k, h, out, at);
  else freeInto(x, h, out, at);
}

function freeInto(x: number, h: number, out: Float64Array, at: number): void {
  const e = Math.exp(-x);
  const p1 = (1 - e) / x;
  out[at] = 1;
  out[at + 1] = h * p1;
  out[at + 2] = 0;
  out[at + 3] = e;
  out[at + 4] = (h * h * (1 - p1)) / x;
  out[at + 5] = h * p1;
  out[at + 6] = (h * h * h * (2 * x - 3 + e * (4 - e))) / (2 * x * x * x);
  out[at + 7] = (h * h * p1 * p1) / 2;
  out[at + 8] = (h * (1 - e * e)) / (2 * x);
}

/** Power series of u'' = −x u' − k u and of its second moments, with time in units of h. */
function seriesInto(x: number, k: number, h: number, out: Float64Array, at: number): void {
  const size = Math.max(2 * x, Math.sqrt(Math.abs(k)) * 1.5);
  // sizeⁿ/n! of the first term left out stays below 1e-9.
  const terms = size < 0.09 ? 6 : size < 0.23 ? 8 : size < 0.5 ? 10 : size < 0.82 ? 12 : 14;
  let r = 0; // displacement from a unit velocity
  let s = 1; // velocity left of it
  let v = 0; // second moments from unit noise
  let c = 0;
  let w = 0;
  let sumR = 0;
  let sumS = 1;
  let sumC = 0;
  let sumV = 0;
  let sumW = 0;
  let sumI = 0;
  for (let j = 0; j < terms; j++) {
    const weight = 1 / (j + 1);
    const nextW = 2 * c * weight;
    const nextC = (v - x * c - k * w) * weight;
    const nextV = ((j === 0 ? 1 : 0) - 2 * x * v - 2 * k * c) * weight;
    const nextR = s * weight;
    const nextS = (-x * s - k * r) * weight;
    sumI += r * weight; // r integrated: response to a constant force
    r = nextR;
    s = nextS;
    v = nextV;
    c = nextC;
    w = nextW;
    sumR += r;
    sumS += s;
    sumV += v;
    sumC += c;
    sumW += w;
  }
  out[at] = sumS + x * sumR;
  out[at + 1] = h * sumR;
  out[at + 2] = (-k * sumR) / h;
  out[at + 3] = sumS;
  out[at + 4] = h * h * sumI;
  out[at + 5] = h * sumR;
  out[at + 6] = h * h * h * sumW;
  out[at + 7] = h * h * sumC;
  out[at + 8] = h * sumV;
}

/**
 * Writes the derivatives of the free transition along friction. They also serve with a force slope: an estimating
 * equation may weigh innovations by any function of the past, so leaving the slope out costs no bias.
 */
export function transitionSlopesInto(friction: number, h: number, out: Float64Array): void {
  const x = friction * h;
  const h2 = h * h;
  if (x < 0.15) {
    // Taylor coefficients of (1 − e⁻ˣ)/x and its relatives; the last term left out is below 1e-9 of the first.
    out[0] = h2 * (-1 / 2 + x * (1 / 3 + x * (-1 / 8 + x * (1 / 30 + x * (-1 / 144 + x / 840)))));
    out[1] = -h * Math.exp(-x);
    out[2] = h2 * h * (-1 / 6 + x * (1 / 12 + x * (-1 / 40 + x * (1 / 180 + x * (-1 / 1008 + x / 6720)))));
    out[3] =
      h2 * h2 * (-1 / 4 + x * (7 / 30 + x * (-1 / 8 + x * (31 / 630 + x * (-1 / 64 + (127 * x) / 30240)))));
    out[4] =
      h2 * h * (-1 / 2 + x * (7 / 12 + x * (-3 / 8 + x * (31 / 180 + x * (-1 / 16 + (127 * x) / 6720)))));
    out[5] = h2 * (-1 + x * (4 / 3 + x * (-1 + x * (8 / 15 + x * (-2 / 9 + (8 * x) / 105)))));
    return;
  }
  const e = Math.exp(-x);
  const p1 = (1 - e) / x;
  const p2 = (1 - p1) / x;
  const d1 = (e - p1) / x;
  const w = (2 * x - 3 + e * (4 - e)) / (2 * x * x * x);
  const v = (1 - e * e) / (2 * x);
  out[0] = h2 * d1;
  out[1] = -h * e;
  out[2] = (h2 * h * (-d1 - p2)) / x;
  out[3] = (h2 * h2 * (p1 * p1 - 3 * w)) / x;
  out[4] = h2 * h * p1 * d1;
  out[5] = (h2 * (e * e - v)) / x;
}
