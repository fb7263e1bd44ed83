import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { closeSync, existsSync, openSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { writeWhole } from '../../src/cli/files.js';
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

  it('leaves signals to the system except while a file is being written', async () => {
    const listeners = (): number => process.listenerCount('SIGINT') + process.listenerCount('SIGTERM');
    const before = listeners();
    const pieces = function* (): Generator<string> {
      expect(listeners()).toBe(before + 2);
      yield 'whole';
    };
    await writeWhole(join(place.path, 'kept.txt'), pieces());
    expect(listeners()).toBe(before);
    expect(place.list()).toEqual(['kept.txt']);
    rmSync(join(place.path, 'kept.txt'));
  });

  it.runIf(existsSync('/dev/full'))('says so in one sentence where standard output is full', async () => {
    const full = openSync('/dev/full', 'w');
    const child = spawn(process.execPath, [...PROGRAM, 'test', '--laws'], {
      cwd: place.path,
      stdio: ['ignore', full, 'pipe'],
    });
    let stderr = '';
    child.stderr?.on('data', (chunk: Buffer) => {
      stderr += chunk.toString();
    });
    const [status] = (await once(child, 'exit')) as [number | null];
    closeSync(full);
    expect(status).toBe(2);
    expect(stderr).toMatch(
      /^wanderlaw: standard output cannot be written: there is no space left; [^\n]*\n$/,
    );
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
