/** A pool of worker threads behind the `MapTasks` signature. */

import { availableParallelism } from 'node:os';
import { fileURLToPath } from 'node:url';
import type { Piscina } from 'piscina';
import { NumericalError, UsageError, DataError } from '../errors.js';
import { mapTasksSerially, type MapTasks } from '../numerics/MapTasks.js';
import type { Batch } from './task.js';

/** Batches per worker: enough for the last ones to even out, few enough that `shared` is copied seldom. */
const BATCHES_PER_WORKER = 4;

export interface WorkerPool {
  readonly workers: number;
  readonly mapTasks: MapTasks;
  /** Ends the threads; the pool cannot be used afterwards. */
  close(): Promise<void>;
}

/** The number of workers used where none is asked for: every core this process may use. */
export function defaultWorkers(): number {
  return availableParallelism();
}

/**
 * Starts a pool. Threads come to life with the first task; with one worker everything runs in this thread.
 * Results never depend on the number of workers: tasks see their own input and what all share, nothing else.
 *
 * @param workers  whole number, at least 1
 */
export function createWorkerPool(workers: number): WorkerPool {
  if (workers <= 1) return { workers: 1, mapTasks: mapTasksSerially, close: async () => {} };
  let starting: Promise<Piscina> | null = null;
  const start = async (): Promise<Piscina> => {
    const piscina = await import('piscina');
    const entry = import.meta.url.endsWith('.ts') ? './taskFromSource.mjs' : './task.js';
    return new piscina.Piscina({
      filename: fileURLToPath(new URL(entry, import.meta.url)),
      maxThreads: workers,
      minThreads: 0,
      idleTimeout: 1000,
      execArgv: [],
    });
  };
  const mapTasks: MapTasks = async (task, shared, inputs, onProgress) => {
    if (inputs.length < 2) return mapTasksSerially(task, shared, inputs, onProgress);
    starting ??= start();
    const pool = await starting;
    const size = Math.max(1, Math.ceil(inputs.length / (workers * BATCHES_PER_WORKER)));
    const batches: Batch[] = [];
    for (let from = 0; from < inputs.length; from += size) {
      batches.push({ name: task.name, shared, inputs: inputs.slice(from, from + size) });
    }
    let done = 0;
    const runBatch = async (batch: Batch): Promise<unknown[]> => {
      const results = (await pool.run(batch).catch((error: unknown) => {
        throw reviveError(error);
      })) as unknown[];
      done += results.length;
      onProgress?.(done, inputs.length);
      return results;
    };
    // All batches end before the first failure is handed on: a pool must not be closed over running tasks.
    const outcomes = await Promise.allSettled(batches.map(runBatch));
    return outcomes.flatMap((outcome) => {
      if (outcome.status === 'rejected') throw outcome.reason;
      return outcome.value as Awaited<ReturnType<typeof task.run>>[];
    });
  };
  return {
    workers,
    mapTasks,
    close: async () => {
      if (starting !== null) await (await starting).destroy();
    },
  };
}

/** Errors lose their class between threads, not their name: expected failures become themselves again. */
function reviveError(error: unknown): unknown {
  if (!(error instanceof Error)) return error;
  const kinds = { UsageError, DataError, NumericalError };
  const Kind = kinds[error.name as keyof typeof kinds];
  return Kind === undefined ? error : new Kind(error.message);
}
