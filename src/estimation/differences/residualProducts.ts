/**
 * Products of residuals with the window of their neighbours: what noise and diffusion are regressed from. A residual
 * times the sum of the residuals it is correlated with has the long-run variance as its mean.
 */

/** Axis pairs whose residual products make up each noise component. */
export function noisePairs(form: string, dimensions: number): [number, number][][] {
  const axes = Array.from({ length: dimensions }, (_, axis) => axis);
  if (form === 'axes') return axes.map((axis) => [[axis, axis]]);
  if (form === 'matrix') return axes.flatMap((a) => axes.slice(a).map((b): [number, number][] => [[a, b]]));
  return [axes.map((axis): [number, number] => [axis, axis])];
}

/** The products of one row, component by component, and how they move with the residuals of each axis. */
export class ResidualProducts {
  readonly pairs: readonly (readonly [number, number])[][];
  /** Length c: mean over the component's axis pairs of `scale` × residual × window, symmetrised. */
  readonly responses: Float64Array;
  /**
   * Shape (c, d): derivative of the response with respect to a shift of all residuals of an axis. Neighbouring rows
   * see almost the same shift, so that one window stands for both factors.
   */
  readonly slopes: Float64Array;
  readonly #windows: Float64Array;

  /**
   * @param form  of the noise: scalar, axes or matrix
   * @param reach  largest lag at which residuals are correlated
   * @param scale  factor of the products
   */
  constructor(
    form: string,
    private readonly dimensions: number,
    private readonly reach: number,
    private readonly scale: number,
  ) {
    this.pairs = noisePairs(form, dimensions);
    this.responses = new Float64Array(this.pairs.length);
    this.slopes = new Float64Array(this.pairs.length * dimensions);
    this.#windows = new Float64Array(dimensions);
  }

  /**
   * @param residuals  shape (rows, d)
   * @param row  with `reach` residuals before and after it
   */
  fill(residuals: Float64Array, row: number): void {
    const { dimensions: d, reach, responses, slopes } = this;
    const windows = this.#windows;
    const at = row * d;
    for (let axis = 0; axis < d; axis++) {
      windows[axis] = 0;
      for (let j = -reach; j <= reach; j++) windows[axis] += residuals[at + axis + j * d];
    }
    slopes.fill(0);
    this.pairs.forEach((pairs, component) => {
      const share = this.scale / pairs.length;
      let response = 0;
      for (const [a, b] of pairs) {
        response += (residuals[at + a] * windows[b] + residuals[at + b] * windows[a]) / 2;
        slopes[component * d + a] += share * windows[b];
        slopes[component * d + b] += share * windows[a];
      }
      responses[component] = share * response;
    });
  }
}
