/** A pool of workers for as long as a piece of work lasts. */

import type { MapTasks } from '../numerics/MapTasks.js';
import { createWorkerPool, defaultWorkers } from '../workers/WorkerPool.js';

/**
 * Runs `work` with a pool and ends the threads afterwards, whatever came of it.
 *
 * @param workers  value of --workers; undefined: all cores
 */
export async function withWorkers<Result>(
  workers: unknown,
  work: (mapTasks: MapTasks) => Promise<Result>,
): Promise<Result> {
  const pool = createWorkerPool(typeof workers === 'number' ? workers : defaultWorkers());
  try {
    return await work(pool.mapTasks);
  } finally {
    await pool.close();
  }
}
