import { afterAll, describe, expect, it } from 'vitest';
import { mapTasksSerially } from '../../src/numerics/MapTasks.js';
import { probeTask } from '../../src/workers/probeTask.js';
import { findTask, TASK_NAMES } from '../../src/workers/taskRegistry.js';
import { createWorkerPool } from '../../src/workers/WorkerPool.js';

const inputs = Array.from({ length: 37 }, (_, i) => Float64Array.of(i, 2 * i, 0.5));

describe('worker pool', () => {
  const pool = createWorkerPool(2);
  afterAll(() => pool.close());

  it('gives the results of the plain loop, in the order of the inputs', async () => {
    const plain = await mapTasksSerially(probeTask, { offset: 3 }, inputs);
    const shared = await pool.mapTasks(probeTask, { offset: 3 }, inputs);
    expect(shared).toEqual(plain);
    expect(plain[2]).toBe(3 + 4 + 16 + 0.25);
  });

  it('counts progress up to the number of inputs', async () => {
    const seen: number[] = [];
    await pool.mapTasks(probeTask, { offset: 0 }, inputs, (done, total) => {
      seen.push(done);
      expect(total).toBe(inputs.length);
    });
    expect(seen.at(-1)).toBe(inputs.length);
    expect([...seen].sort((a, b) => a - b)).toEqual(seen);
  });

  it('hands back the failure of a task', async () => {
    const unknown = { ...probeTask, name: 'no-such-task' };
    await expect(pool.mapTasks(unknown, { offset: 0 }, inputs)).rejects.toThrow('no-such-task');
  });

  it('finds every registered task under its own name', async () => {
    for (const name of TASK_NAMES) expect((await findTask(name)).name).toBe(name);
  });
});
