/**
 * Where a worker finds the function behind a task's name. Modules are loaded when first asked for, so a worker loads
 * only what its tasks need.
 */

import type { Task } from '../numerics/MapTasks.js';

type AnyTask = Task<unknown, unknown, unknown>;

const LOADERS: Readonly<Record<string, () => Promise<AnyTask>>> = {
  'describe-replicate': async () =>
    (await import('../checks/describeReplicateTask.js')).describeReplicateTask as AnyTask,
  'judge-fit': async () => (await import('./judgeFitTask.js')).judgeFitTask as AnyTask,
  'refit-drawn': async () => (await import('../uncertainty/refitBootstrap.js')).refitDrawnTask as AnyTask,
  'refit-replicate': async () => (await import('../checks/refineFit.js')).refitReplicateTask as AnyTask,
  'simulate-tracks': async () =>
    (await import('../simulation/simulateScenario.js')).simulateTracksTask as AnyTask,
  'sum-of-squares': async () => (await import('./probeTask.js')).probeTask as AnyTask,
};

/** The names of all tasks that a worker can run. */
export const TASK_NAMES = Object.keys(LOADERS);

/** @throws Error where no task has that name (a fault of the program, never of its user) */
export async function findTask(name: string): Promise<AnyTask> {
  const load = LOADERS[name];
  if (load === undefined) throw new Error(`no task is registered under the name "${name}"`);
  return load();
}
