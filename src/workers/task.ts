/** What a worker thread runs: a batch of inputs for one task. */

import { findTask } from './taskRegistry.js';

export interface Batch {
  readonly name: string;
  readonly shared: unknown;
  readonly inputs: readonly unknown[];
}

/** @returns the results in the order of the inputs */
export default async function runBatch(batch: Batch): Promise<unknown[]> {
  const task = await findTask(batch.name);
  const results: unknown[] = [];
  for (const input of batch.inputs) results.push(await task.run(batch.shared, input));
  return results;
}
