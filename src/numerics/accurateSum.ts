/**
 * Sums of products whose rounding errors are carried along, as if computed with twice the digits.
 *
 * Source  Ogita, Rump & Oishi, Accurate sum and dot product, SIAM J. Sci. Comput. 26 (2005) 1955; products: Dekker, A
 *         floating-point technique for extending the available precision, Numer. Math. 18 (1971) 224.
 */

const SPLITTER = 2 ** 27 + 1;

/** a b − fl(a b), exactly, where nothing overflows. */
export function errorOfProduct(a: number, b: number, product: number): number {
  const aScaled = SPLITTER * a;
  const aHigh = aScaled - (aScaled - a);
  const aLow = a - aHigh;
  const bScaled = SPLITTER * b;
  const bHigh = bScaled - (bScaled - b);
  const bLow = b - bHigh;
  return aLow * bLow - (product - aHigh * bHigh - aLow * bHigh - aHigh * bLow);
}

/** A running sum that is rounded once, when it is read. */
export class AccurateSum {
  #high = 0;
  #low = 0;

  /** Begins anew. */
  start(value: number): void {
    this.#high = value;
    this.#low = 0;
  }

  add(value: number): void {
    const sum = this.#high + value;
    const part = sum - this.#high;
    this.#low += this.#high - (sum - part) + (value - part);
    this.#high = sum;
  }

  addProduct(a: number, b: number): void {
    const product = a * b;
    this.#low += errorOfProduct(a, b, product);
    this.add(product);
  }

  value(): number {
    return this.#high + this.#low;
  }
}
