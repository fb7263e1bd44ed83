/**
 * Splitting work: a computation that falls into independent tasks asks a `MapTasks` function to run them, and gets
 * the results in the order of the inputs. Who runs them (this thread, or a pool of workers) is decided outside, so
 * a task's result may depend on `shared` and its input alone.
 */

/**
 * A function that can also be run in another thread. Both arguments and the result must survive structured cloning
 * (plain objects, arrays, typed arrays, numbers, strings); the name is how a worker finds the function.
 */
export interface Task<Shared, Input, Output> {
  readonly name: string;
  run(shared: Shared, input: Input): Output | Promise<Output>;
}

/** Runs a task once per input; `shared` is the same for all. Results come in the order of the inputs. */
export type MapTasks = <Shared, Input, Output>(
  task: Task<Shared, Input, Output>,
  shared: Shared,
  inputs: readonly Input[],
  onProgress?: (done: number, total: number) => void,
) => Promise<Output[]>;

/** The plain way: one input after another, in this thread. */
export const mapTasksSerially: MapTasks = async (task, shared, inputs, onProgress) => {
  const results = [];
  for (const input of inputs) {
    results.push(await task.run(shared, input));
    onProgress?.(results.length, inputs.length);
  }
  return results;
};
