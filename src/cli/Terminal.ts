/** How a command speaks: results to standard output; notes, warnings and progress to standard error. */

import { resolve } from 'node:path';
import picocolors from 'picocolors';
import type { Warning } from '../errors.js';
import { createProgress, NO_PROGRESS, type Progress } from './progress.js';

/** The outside of the process as far as the program uses it; tests hand in their own. */
export interface Streams {
  readonly stdout: NodeJS.WritableStream & { readonly isTTY?: boolean; readonly columns?: number };
  readonly stderr: NodeJS.WritableStream & { readonly isTTY?: boolean; readonly columns?: number };
  readonly stdin: NodeJS.ReadableStream;
  readonly env: Readonly<Record<string, string | undefined>>;
  /** Directory that relative paths start from. */
  readonly cwd: string;
  /** The clock behind progress, in milliseconds. */
  now(): number;
}

/** The streams of this process. */
export function processStreams(): Streams {
  const { stdout, stderr, stdin, env } = process;
  return { stdout, stderr, stdin, env, cwd: process.cwd(), now: () => performance.now() };
}

type Colors = ReturnType<typeof picocolors.createColors>;

export class Terminal {
  readonly streams: Streams;
  readonly quiet: boolean;
  /** Colors for standard output and standard error: plain unless the stream is a terminal and NO_COLOR is unset. */
  readonly colors: Colors;
  readonly noteColors: Colors;

  constructor(streams: Streams, quiet: boolean) {
    this.streams = streams;
    this.quiet = quiet;
    const wanted = !streams.env.NO_COLOR && streams.env.TERM !== 'dumb';
    this.colors = picocolors.createColors(wanted && streams.stdout.isTTY === true);
    this.noteColors = picocolors.createColors(wanted && streams.stderr.isTTY === true);
  }

  /** Width to wrap text for people at. */
  get width(): number {
    return Math.max(40, Math.min(120, this.streams.stdout.columns ?? 100));
  }

  /** How summaries for people are laid out on standard output. */
  get summaryStyle(): { readonly width: number; readonly colors: Colors } {
    return { width: this.width, colors: this.colors };
  }

  /** The absolute path of a path as typed. */
  resolve(path: string): string {
    return resolve(this.streams.cwd, path);
  }

  /** True once nobody reads standard output any more (`wanderlaw … | head`). */
  get isClosed(): boolean {
    return !this.streams.stdout.writable;
  }

  /** Writes to standard output, waiting while its buffer is full. */
  async print(text: string): Promise<void> {
    const { stdout } = this.streams;
    if (this.isClosed || stdout.write(text)) return;
    await new Promise<void>((done) => {
      const finish = (): void => {
        for (const event of ['drain', 'close', 'error']) stdout.removeListener(event, finish);
        done();
      };
      for (const event of ['drain', 'close', 'error']) stdout.once(event, finish);
    });
  }

  /** One JSON document on standard output. */
  async printJson(value: unknown): Promise<void> {
    await this.print(`${JSON.stringify(value, null, 2)}\n`);
  }

  /** A line on standard error that tells what happened; silent with `--quiet`. */
  note(text: string): void {
    if (!this.quiet) this.streams.stderr.write(`wanderlaw: ${text}\n`);
  }

  /** Advice on standard error, with its code for those who look it up; silent with `--quiet`. */
  warn(warning: Warning): void {
    this.note(`${this.noteColors.yellow('warning')}: ${warning.message} [${warning.code}]`);
  }

  /** The sentence an error ends the command with; never silent. */
  fail(sentence: string): void {
    this.streams.stderr.write(`${this.noteColors.red('wanderlaw')}: ${sentence}\n`);
  }

  /** A progress bar where standard error is a terminal, otherwise nothing. */
  async startProgress(title: string): Promise<Progress> {
    const { stderr, env, now } = this.streams;
    if (this.quiet || stderr.isTTY !== true || env.TERM === 'dumb') return NO_PROGRESS;
    const library = (await import('cli-progress')).default;
    const width = Math.max(40, stderr.columns ?? 80);
    return createProgress(library, { stream: stderr, title, width, now });
  }
}
