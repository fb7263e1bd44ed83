/** Flat numbers of unknown count: typed arrays that double when they are full. */

type NumberArray = Float64Array | Int32Array;

export class GrowableArray<T extends NumberArray> {
  #values: T;
  #length = 0;
  readonly #create: (length: number) => T;

  constructor(create: (length: number) => T, capacity = 1024) {
    this.#create = create;
    this.#values = create(capacity);
  }

  get length(): number {
    return this.#length;
  }

  push(value: number): void {
    if (this.#length === this.#values.length) this.#grow();
    this.#values[this.#length++] = value;
  }

  /** The values so far, without a copy: a view that the next push may leave behind. */
  view(): T {
    return this.#values.subarray(0, this.#length) as T;
  }

  #grow(): void {
    const larger = this.#create(2 * this.#values.length);
    larger.set(this.#values);
    this.#values = larger;
  }
}

export function growFloats(): GrowableArray<Float64Array> {
  return new GrowableArray((length) => new Float64Array(length));
}

export function growIntegers(): GrowableArray<Int32Array> {
  return new GrowableArray((length) => new Int32Array(length));
}
