/**
 * Temporary files that have not yet become what they are for. Signals are listened to only while there are any: a
 * listener would have to wait for a computation to end, whereas the system ends the program at once.
 */

import { rmSync } from 'node:fs';

const SIGNALS = ['SIGINT', 'SIGTERM', 'SIGHUP'] as const;

const unfinished = new Set<string>();

/** Sees to it that a file is removed where a signal ends the program before `release`. */
export function hold(path: string): void {
  if (unfinished.size === 0) for (const signal of SIGNALS) process.on(signal, endBySignal);
  unfinished.add(path);
}

/** The file is complete, or gone. */
export function release(path: string): void {
  if (!unfinished.delete(path) || unfinished.size > 0) return;
  for (const signal of SIGNALS) process.off(signal, endBySignal);
}

/** Removes what an interrupted command would leave behind. */
export function removeUnfinishedFiles(): void {
  for (const path of [...unfinished]) {
    rmSync(path, { force: true });
    release(path);
  }
}

function endBySignal(signal: NodeJS.Signals): void {
  removeUnfinishedFiles();
  process.kill(process.pid, signal); // the listeners are gone: ends the way the signal says
}
