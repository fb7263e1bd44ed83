/** Flat numbers of unknown count: typed arrays that double when they are full. */

/** Public fields for the hot loop: write to `values` behind `length` after `reserve`, then raise `length`. */
export class GrowableArray<T extends Float64Array | Int32Array> {
  /** The numbers so far and room for more; replaced when the array grows. */
  values: T;
  /** How many numbers there are. */
  length = 0;
  readonly #create: (length: number) => T;

  constructor(create: (length: number) => T, capacity = 1024) {
    this.#create = create;
    this.values = create(capacity);
  }

  /** Makes room for some more numbers. */
  reserve(count: number): void {
    if (this.length + count > this.values.length) this.#grow(count);
  }

  push(value: number): void {
    this.reserve(1);
    this.values[this.length++] = value;
  }

  /** The numbers so far, without a copy: a view that the next push may leave behind. */
  view(): T {
    return this.values.subarray(0, this.length) as T;
  }

  #grow(count: number): void {
    const larger = this.#create(2 * this.values.length + count);
    larger.set(this.values);
    this.values = larger;
  }
}

export function growFloats(): GrowableArray<Float64Array> {
  return new GrowableArray((length) => new Float64Array(length));
}

export function growIntegers(): GrowableArray<Int32Array> {
  return new GrowableArray((length) => new Int32Array(length));
}
