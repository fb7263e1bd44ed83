/** Runs damaged examples through a reader and collects the faults: anything but acceptance or one sentence. */

import { WanderlawError } from '../../src/errors.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import type { Target } from './targets.js';

export interface Fault {
  readonly target: string;
  readonly number: number;
  readonly finding: string;
  readonly input: string;
}

export interface Tally {
  readonly accepted: number;
  readonly refused: number;
  readonly faults: readonly Fault[];
  /** Longest time a single case took, milliseconds. */
  readonly longest: number;
}

/** Case `number` of a target is the same in every run with the same seed. */
export async function fuzzTarget(target: Target, cases: number, seed: number): Promise<Tally> {
  let accepted = 0;
  let refused = 0;
  let longest = 0;
  const faults: Fault[] = [];
  for (let number = 0; number < cases; number++) {
    const input = target.draw(randomStream(seed, `fuzz ${target.name}`, number));
    const start = performance.now();
    const finding = await outcomeOf(target, input);
    longest = Math.max(longest, performance.now() - start);
    if (finding === 'accepted') accepted++;
    else if (finding === 'refused') refused++;
    else {
      const text = typeof input === 'string' ? input : Buffer.from(input).toString('latin1');
      faults.push({ target: target.name, number, finding, input: text.slice(0, 2000) });
    }
  }
  return { accepted, refused, faults, longest };
}

async function outcomeOf(target: Target, input: Uint8Array | string): Promise<string> {
  try {
    await target.read(input);
    return 'accepted';
  } catch (error) {
    if (!(error instanceof WanderlawError)) {
      return error instanceof Error
        ? `${error.name}: ${error.message}\n${error.stack ?? ''}`.slice(0, 900)
        : String(error);
    }
    if (/\n\s*at |undefined|\[object/.test(error.message)) return `an unreadable sentence: ${error.message}`;
    if (error.message.trim() === '') return 'an empty sentence';
    return 'refused';
  }
}
