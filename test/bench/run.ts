/**
 * `npm run bench [-- ROWS…]`: positions per second, peak memory and the ratio to a reference measured in the same run, for
 * tables of 10⁵ and 10⁶ positions (or those asked for). References: the bare parser of CSV for the import, NumPy and SciPy
 * (`differences.py`) for the fit. Processor time counts all threads, and suffers less from what else the machine does. Stages run one after another, each in a process of its own.
 */

import { spawnSync } from 'node:child_process';
import { createWriteStream, mkdtempSync, rmSync } from 'node:fs';
import { cpus, tmpdir } from 'node:os';
import { join } from 'node:path';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { fileURLToPath } from 'node:url';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';

const here = (name: string): string => fileURLToPath(new URL(name, import.meta.url));
const FRAMES = 1000;
const BATCH = 100; // tracks made at a time
const FIT =
  'fit --order second --estimator differences --force spline:8 --friction spline:8 --noise spline:8 --replicates 200';

interface Measured {
  readonly seconds: number;
  /** Of all threads, seconds. */
  readonly processor: number;
  readonly megabytes: number;
}

/** A trapped, stirred-by-noise second-order process in two dimensions, sampled at friction × interval 0.2. */
async function writeTable(path: string, rows: number): Promise<void> {
  const table = function* (): Generator<string> {
    for (let first = 0; first < rows / FRAMES; first += BATCH) {
      const count = Math.min(BATCH, rows / FRAMES - first);
      const process = {
        frames: FRAMES,
        interval: 0.1,
        dimensions: 2,
        friction: 2,
        stiffness: 1,
        temperature: 1,
      };
      const tracks = simulateSecondOrder({ ...process, tracks: count, localizationError: 0.02, seed: first });
      const named = { ...tracks, trackNames: tracks.trackNames.map((_, i) => String(first + i)) };
      const text = [...formatTrackTable(named)].join('');
      yield first === 0 ? text : text.slice(text.indexOf('\n') + 1);
    }
  };
  await pipeline(Readable.from(table()), createWriteStream(path));
}

function runJson(command: string, words: readonly string[]): Record<string, number> {
  const { status, stdout, stderr } = spawnSync(command, words, { encoding: 'utf8', maxBuffer: 1 << 28 });
  if (status !== 0) throw new Error(`${command} ${words[0]} ended with ${status}: ${stderr}`);
  return JSON.parse(stdout) as Record<string, number>;
}

function runStage(stage: string, path: string): Measured {
  const { seconds, processor, megabytes } = runJson(process.execPath, [here('stage.mjs'), stage, path]);
  return { seconds, processor, megabytes };
}

/** The whole command, start of the program included. */
function runFit(path: string): Measured {
  const words = [
    here('../../dist/bin/wanderlaw.js'),
    ...FIT.split(' '),
    path,
    '-o',
    `${path}.json`,
    '--quiet',
  ];
  const start = performance.now();
  const { status, stderr } = spawnSync(process.execPath, ['--import', here('reportMemory.mjs'), ...words], {
    encoding: 'utf8',
  });
  if (status !== 0) throw new Error(`fit ended with ${status}: ${stderr}`);
  const [, peak, processor] = /peak ([\d.]+) MB, processor ([\d.]+) s/.exec(stderr) ?? [];
  return {
    seconds: (performance.now() - start) / 1000,
    processor: Number(processor),
    megabytes: Number(peak),
  };
}

function runReference(path: string): Measured {
  const start = performance.now();
  const { peak, processor } = runJson('python3', [here('differences.py'), path]);
  return { seconds: (performance.now() - start) / 1000, processor, megabytes: peak };
}

const sizes = process.argv.slice(2).map(Number);
const directory = mkdtempSync(join(tmpdir(), 'wanderlaw-bench-'));
const model = cpus()[0]?.model ?? 'unknown processor';
console.log(
  `${new Date().toISOString().slice(0, 10)}, ${cpus().length} × ${model}, Node ${process.version}\n`,
);
console.log(
  '| positions | stage | seconds | of processors | positions per second | peak memory (MB) | time ÷ reference | of processors |',
);
console.log('| --- | --- | --- | --- | --- | --- | --- | --- |');
try {
  for (const rows of sizes.length > 0 ? sizes : [100_000, 1_000_000]) {
    const path = join(directory, `${rows}.csv`);
    await writeTable(path, rows);
    const print = (stage: string, measured: Measured, reference: Measured | null): void => {
      const ratios =
        reference === null
          ? ['', '']
          : [measured.seconds / reference.seconds, measured.processor / reference.processor].map((ratio) =>
              ratio.toFixed(2),
            );
      const { seconds, processor, megabytes } = measured;
      const cells = [rows, stage, seconds.toFixed(2), processor.toFixed(2), Math.round(rows / seconds)];
      console.log(`| ${[...cells, Math.round(megabytes), ...ratios].join(' | ')} |`);
    };
    const parsed = runStage('parse', path);
    print('bare parser', parsed, null);
    print('import', runStage('import', path), parsed);
    print('survey', runStage('survey', path), null);
    const reference = rows <= 1_000_000 ? runReference(path) : null; // beyond, it needs tens of gigabytes
    if (reference !== null) print('the same fit in NumPy', reference, null);
    print('fit', runFit(path), reference);
    rmSync(path);
  }
} finally {
  rmSync(directory, { recursive: true, force: true });
}
