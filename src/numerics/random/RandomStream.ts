/**
 * Seeded random streams. A stream is made from the study's seed, a purpose and an index, all hashed into the state of
 * the generator, so that neighbouring seeds and indices give unrelated streams and results never depend on how work
 * was split among workers.
 *
 * Source  generator: Blackman & Vigna, Scrambled linear pseudorandom number generators, ACM TOMS 47 (2021) 36
 *         (xoroshiro128+, from pure-rand); normals: Marsaglia & Tsang, The ziggurat method for generating random
 *         variables, J. Stat. Software 5 (2000) 8, with the 256-layer constants of that paper and 53-bit uniforms.
 */

import { xoroshiro128plusFromState } from 'pure-rand/generator/xoroshiro128plus';
import type { JumpableRandomGenerator } from 'pure-rand/types/JumpableRandomGenerator';

const LAYERS = 256;
const TAIL_START = 3.6541528853610088; // right edge of the base layer (Marsaglia & Tsang 2000)
const LAYER_AREA = 0.00492867323399; // area of each layer, same source

/** Layer edges x[i] and densities f(x[i]) of the ziggurat. */
function buildLayers(): { edges: Float64Array; densities: Float64Array } {
  const edges = new Float64Array(LAYERS + 1);
  const density = (x: number): number => Math.exp(-0.5 * x * x);
  edges[0] = LAYER_AREA / density(TAIL_START);
  edges[1] = TAIL_START;
  for (let i = 2; i < LAYERS; i++) {
    edges[i] = Math.sqrt(-2 * Math.log(LAYER_AREA / edges[i - 1] + density(edges[i - 1])));
  }
  edges[LAYERS] = 0;
  return { edges, densities: edges.map(density) };
}

const { edges: EDGES, densities: DENSITIES } = buildLayers();

/** A source of random numbers with its own state. */
export class RandomStream {
  readonly #generator: JumpableRandomGenerator;

  constructor(state: readonly [number, number, number, number]) {
    this.#generator = xoroshiro128plusFromState(state);
  }

  /** A 32-bit integer, as a signed number. */
  bits(): number {
    return this.#generator.next() | 0;
  }

  /** Uniform in [0, 1), 53 bits. */
  uniform(): number {
    const high = this.bits() >>> 5;
    const low = this.bits() >>> 6;
    return (high * 67108864 + low) / 9007199254740992;
  }

  /** Uniform integer in 0 … count − 1. */
  integer(count: number): number {
    return Math.floor(this.uniform() * count);
  }

  /** Standard normal. */
  normal(): number {
    for (;;) {
      const word = this.bits();
      const layer = word >>> 24; // high bits: the lowest bit of this generator is its weakest
      // 24 signed bits of the first word and 29 of a second give the place in the layer.
      const place = (((word << 8) >> 8) * 536870912 + (this.bits() >>> 3)) / 4503599627370496;
      const x = place * EDGES[layer];
      if (Math.abs(x) < EDGES[layer + 1]) return x;
      if (layer === 0) return this.#tail(x < 0);
      const height = DENSITIES[layer] + this.uniform() * (DENSITIES[layer + 1] - DENSITIES[layer]);
      if (height < Math.exp(-0.5 * x * x)) return x;
    }
  }

  /** Beyond the base layer: Marsaglia's exponential rejection. */
  #tail(negative: boolean): number {
    let x: number;
    let y: number;
    do {
      x = -Math.log(1 - this.uniform()) / TAIL_START;
      y = -Math.log(1 - this.uniform());
    } while (2 * y < x * x);
    return negative ? -(TAIL_START + x) : TAIL_START + x;
  }
}

/**
 * The stream for one purpose and index under a seed, e.g. `randomStream(seed, 'bootstrap', 17)`.
 *
 * @param seed  any finite number; the same seed, purpose and index always give the same stream
 */
export function randomStream(seed: number, purpose: string, index = 0): RandomStream {
  const key = `${seed}\u0000${purpose}\u0000${index}`;
  const state: [number, number, number, number] = [0, 0, 0, 0];
  for (let word = 0; word < 4; word++) state[word] = hash(key, 0x9e3779b9 * (word + 1));
  if (state.every((part) => part === 0)) state[0] = 1;
  return new RandomStream(state);
}

/** 32-bit avalanche hash of a string (FNV-1a rounds closed by the murmur3 finaliser). */
function hash(text: string, salt: number): number {
  let h = (2166136261 ^ salt) | 0;
  for (let i = 0; i < text.length; i++) {
    h = Math.imul(h ^ text.charCodeAt(i), 16777619);
    h ^= h >>> 13;
  }
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) | 0;
}
