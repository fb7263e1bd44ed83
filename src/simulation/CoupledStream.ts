/** The same path of the noise at several time steps, so that their difference is seen and not their scatter. */

import { RandomStream } from '../numerics/random/RandomStream.js';

/**
 * A stream whose normals are sums over the fine steps inside a coarse one, (ξ₁ + … + ξ_r)/√r: standard normals again,
 * and for a small step nearly the same path. Other draws come from a generator of its own.
 */
export class CoupledStream extends RandomStream {
  #fine: Float64Array = new Float64Array(0);
  #ratio = 1;
  #dimensions = 1;
  #step = 0;
  #axis = 0;

  /**
   * Loads the next stretch of the path.
   *
   * @param fine  shape (fine steps, d): standard normals, one per axis and fine step
   * @param ratio  fine steps in one step of this stream; it is asked for d normals in each
   */
  load(fine: Float64Array, ratio: number, dimensions: number): void {
    this.#fine = fine;
    this.#ratio = ratio;
    this.#dimensions = dimensions;
    this.#step = 0;
    this.#axis = 0;
  }

  override normal(): number {
    const first = this.#step * this.#ratio;
    let sum = 0;
    for (let k = 0; k < this.#ratio; k++) sum += this.#fine[(first + k) * this.#dimensions + this.#axis];
    this.#axis++;
    if (this.#axis === this.#dimensions) {
      this.#axis = 0;
      this.#step++;
    }
    return sum / Math.sqrt(this.#ratio);
  }
}
