import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { Workplace } from './runInProcess.js';

const place = new Workplace();
afterAll(() => place.remove());

const PROGRAM = [
  '--import',
  import.meta.resolve('tsx'),
  fileURLToPath(new URL('../../bin/wanderlaw.ts', import.meta.url)),
];

describe('the program as a process', () => {
  it('ends by the signal it gets and leaves nothing half-written', async () => {
    const child = spawn(process.execPath, [...PROGRAM, 'fit', '-', '-o', 'fit.json'], { cwd: place.path });
    const exit = once(child, 'exit') as Promise<[number | null, string | null]>;
    child.stdin.write('track,time,x\n1,0,0\n');
    await new Promise((done) => setTimeout(done, 1500)); // long enough to be reading
    child.kill('SIGINT');
    const [status, signal] = await exit;
    expect([status, signal]).toEqual([null, 'SIGINT']);
    expect(place.list()).toEqual([]);
  });

  it('ends quietly where nobody reads its output to the end', async () => {
    const child = spawn(process.execPath, [...PROGRAM, 'fit', '--help'], { cwd: place.path });
    child.stdout.destroy();
    let stderr = '';
    child.stderr.on('data', (chunk: Buffer) => {
      stderr += chunk.toString();
    });
    const [status] = (await once(child, 'exit')) as [number | null];
    expect([status, stderr]).toEqual([0, '']);
  });

  it('hands its exit status to the shell', async () => {
    const child = spawn(process.execPath, [...PROGRAM, 'survey', 'nowhere.csv'], { cwd: place.path });
    const [status] = (await once(child, 'exit')) as [number | null];
    expect(status).toBe(3);
  });
});
