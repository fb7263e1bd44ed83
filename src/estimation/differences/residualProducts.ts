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
  #residuals: Float64Array = new Float64Array(0);
  #row = 0;

  /**
   * @param form  of the noise: scalar, axes or matrix
   * @param reach  largest lag at which residuals are correlated
   * @param scale  factor of the products
   */
  constructor(
    form: string,
    private readonly dimensions: number,
    readonly reach: number,
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
    this.#residuals = residuals;
    this.#row = row;
    const { dimensions: d, reach, slopes } = this;
    const windows = this.#windows;
    for (let axis = 0; axis < d; axis++) {
      windows[axis] = 0;
      for (let j = -reach; j <= reach; j++) windows[axis] += residuals[(row + j) * d + axis];
    }
    this.#multiply();
    slopes.fill(0);
    this.pairs.forEach((pairs, component) => {
      const share = this.scale / pairs.length;
      for (const [a, b] of pairs) {
        slopes[component * d + a] += share * windows[b];
        slopes[component * d + b] += share * windows[a];
      }
    });
  }

  /**
   * Replaces, in the responses, the residuals before the row by those after it: the sum over a run is the same but for
   * its ends. For a regression on the place of the row this is the better arrangement: given that place, residuals
   * after it have mean zero, those before it do not (who has come to a far place has moved outwards), and products of
   * them with the localization error of the place would lower the noise wherever the density falls. The slopes are to
   * be asked for by `fillSlopesAhead`.
   */
  lookAhead(): void {
    const { dimensions: d, reach } = this;
    const residuals = this.#residuals;
    const at = this.#row * d;
    for (let axis = 0; axis < d; axis++) {
      let sum = residuals[at + axis];
      for (let j = 1; j <= reach; j++) sum += 2 * residuals[at + axis + j * d];
      this.#windows[axis] = sum;
    }
    this.#multiply();
  }

  /**
   * Derivative of the responses after `lookAhead` with respect to a shift of the residuals some rows ahead, in `slopes`.
   *
   * @param ahead  0 … reach
   */
  fillSlopesAhead(ahead: number): void {
    const { dimensions: d, slopes } = this;
    const residuals = this.#residuals;
    const windows = this.#windows;
    const at = this.#row * d;
    const slopeOf = (other: number): number =>
      ahead === 0 ? (windows[other] + residuals[at + other]) / 2 : residuals[at + other];
    slopes.fill(0);
    this.pairs.forEach((pairs, component) => {
      const share = this.scale / pairs.length;
      for (const [a, b] of pairs) {
        slopes[component * d + a] += share * slopeOf(b);
        slopes[component * d + b] += share * slopeOf(a);
      }
    });
  }

  /** Responses from the residual of the row and the windows. */
  #multiply(): void {
    const windows = this.#windows;
    const residuals = this.#residuals;
    const at = this.#row * this.dimensions;
    this.pairs.forEach((pairs, component) => {
      let response = 0;
      for (const [a, b] of pairs)
        response += (residuals[at + a] * windows[b] + residuals[at + b] * windows[a]) / 2;
      this.responses[component] = (this.scale / pairs.length) * response;
    });
  }
}
