/** Runs a command line in this process and keeps what it printed. */

import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Readable, Writable } from 'node:stream';
import { run } from '../../src/cli/main.js';

export interface Outcome {
  readonly status: number;
  readonly stdout: string;
  readonly stderr: string;
}

export interface Setting {
  readonly cwd?: string;
  readonly stdin?: string;
  readonly env?: Readonly<Record<string, string>>;
  /** Whether both outputs pretend to be a terminal. */
  readonly isTTY?: boolean;
  /** The clock, in milliseconds; default: it stands still. */
  readonly now?: () => number;
}

class Sink extends Writable {
  readonly isTTY: boolean;
  readonly columns = 100;
  text = '';

  constructor(isTTY: boolean) {
    super({ decodeStrings: false });
    this.isTTY = isTTY;
  }

  // what cli-progress asks of a terminal
  cursorTo(): boolean {
    return true;
  }
  clearLine(): boolean {
    return true;
  }
  moveCursor(): boolean {
    return true;
  }

  override _write(chunk: string | Uint8Array, _encoding: string, done: () => void): void {
    this.text += typeof chunk === 'string' ? chunk : Buffer.from(chunk).toString();
    done();
  }
}

export async function runInProcess(argv: readonly string[], setting: Setting = {}): Promise<Outcome> {
  const stdout = new Sink(setting.isTTY ?? false);
  const stderr = new Sink(setting.isTTY ?? false);
  const status = await run(argv, {
    stdout,
    stderr,
    stdin: Readable.from(setting.stdin === undefined ? [] : [Buffer.from(setting.stdin)]),
    env: setting.env ?? {},
    cwd: setting.cwd ?? process.cwd(),
    now: setting.now ?? (() => 0),
  });
  return { status, stdout: stdout.text, stderr: stderr.text };
}

/** A directory of its own for each test file. */
export class Workplace {
  readonly path = mkdtempSync(join(tmpdir(), 'wanderlaw-cli-'));

  /** Writes a file and returns its name, as it would be typed in the directory. */
  write(name: string, content: string | Uint8Array): string {
    writeFileSync(join(this.path, name), content);
    return name;
  }

  list(): string[] {
    return readdirSync(this.path).sort();
  }

  run(argv: readonly string[], setting: Setting = {}): Promise<Outcome> {
    return runInProcess(argv, { cwd: this.path, ...setting });
  }

  remove(): void {
    rmSync(this.path, { recursive: true, force: true });
  }
}
