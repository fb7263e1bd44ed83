/** Progress of work that takes a while: stage, bar, per cent and the time left, on one line of standard error. */

import type cliProgress from 'cli-progress';

/** Progress of one long step; `stop` takes the bar off the screen. */
export interface Progress {
  /** @param total  above 0; done and total count anything that is spread evenly over the time */
  update(done: number, total: number, stage?: string): void;
  stop(): void;
}

/** Where nobody watches. */
export const NO_PROGRESS: Progress = { update: () => {}, stop: () => {} };

/** Nothing is shown of work that seems to end within this time, s. */
const WORTH_SHOWING = 2;
/** Before this time a guess at the whole is too rough to go by, s. */
const FIRST_GUESS = 0.5;

/** A share that falls by more than this begins a piece of work of its own, whose time is counted anew. */
const RESTART = 0.25;

/** Columns besides bar and stage: the per cent and the time left. */
const BESIDE = 30;

export interface ProgressSetting {
  readonly stream: NodeJS.WritableStream;
  readonly title: string;
  /** Columns of the terminal. */
  readonly width: number;
  /** The clock, in milliseconds. */
  readonly now: () => number;
}

/**
 * A bar that appears once the work is seen to take more than two seconds, so that short work leaves no flicker.
 *
 * It hides no cursor and changes no setting of the terminal: nothing has to be mended after an interruption.
 */
export function createProgress(
  { SingleBar, Presets }: typeof cliProgress,
  { stream, title, width, now }: ProgressSetting,
): Progress {
  let started = now();
  let bar: cliProgress.SingleBar | null = null;
  let furthest = 0;
  const open = (stage: string): cliProgress.SingleBar => {
    const created = new SingleBar(
      {
        stream,
        format: '{stage} {bar} {percentage} %{left}',
        barsize: Math.max(5, Math.min(30, width - BESIDE - LONGEST_STAGE)),
        clearOnComplete: true,
        hideCursor: false,
        linewrap: true, // as terminals have it: nothing is switched off
        gracefulExit: false,
      },
      Presets.shades_classic,
    );
    created.start(1, furthest, { stage, left: '' });
    return created;
  };
  return {
    update(done, total, stage = title) {
      const share = Math.min(1, done / total);
      if (share < furthest - RESTART) [started, furthest] = [now(), share];
      furthest = Math.max(furthest, share);
      const seconds = (now() - started) / 1000;
      if (bar === null) {
        const expected = furthest > 0 ? seconds / furthest : 0;
        if (seconds < FIRST_GUESS || Math.max(seconds, expected) < WORTH_SHOWING) return;
        bar = open(stage);
      }
      bar.update(furthest, { stage, left: describeTimeLeft(seconds, furthest) });
    },
    stop() {
      bar?.stop();
      bar = null;
    },
  };
}

/** Stages are short words; a longer one only takes room from the bar. */
const LONGEST_STAGE = 16;

/** `, about 2 min left`; empty while too little is done to tell. */
export function describeTimeLeft(seconds: number, share: number): string {
  if (share < 0.02) return '';
  const left = (seconds * (1 - share)) / share;
  if (left < 1) return ', nearly done';
  if (left < 90) return `, about ${Math.round(left)} s left`;
  if (left < 5400) return `, about ${Math.round(left / 60)} min left`;
  return `, about ${Math.round(left / 3600)} h left`;
}
