/**
 * Runs every notebook in Jupyter without a window and stores what its cells print and draw: `npm run notebooks`, or
 * `npm run notebooks NAME.ipynb` for one. Needs `jupyter nbconvert` and the TypeScript kernel (see README.md here).
 */

import { spawnSync } from 'node:child_process';
import {
  existsSync,
  mkdirSync,
  readdirSync,
  readFileSync,
  renameSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { join, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';

const ROOT = fileURLToPath(new URL('..', import.meta.url));
const WORK = join(ROOT, 'out', 'notebook-run');
/** Where the kernel is: a path in TSLAB, or the package installed here. */
const KERNEL = resolve(process.env.TSLAB ?? join(ROOT, 'node_modules', '.bin', 'tslab'));

/** The parts of a notebook that are looked at here. */
interface Cell {
  readonly cell_type: string;
  readonly id: string;
  readonly metadata: Record<string, unknown>;
  readonly source: readonly string[];
  execution_count?: number | null;
  outputs?: Record<string, unknown>[];
}

interface Notebook {
  readonly cells: readonly Cell[];
  readonly metadata: Record<string, unknown>;
}

function prepareWorkplace(): void {
  if (!existsSync(KERNEL)) {
    throw new Error(`there is no TypeScript kernel at ${KERNEL}; notebooks/README.md says how to install it`);
  }
  rmSync(WORK, { recursive: true, force: true });
  mkdirSync(join(WORK, 'kernels', 'tslab'), { recursive: true });
  mkdirSync(join(WORK, 'tree', 'node_modules'), { recursive: true });
  mkdirSync(join(WORK, 'tree', 'notebooks'));
  // The package under its name, and the data where the notebooks look for them.
  symlinkSync(ROOT, join(WORK, 'tree', 'node_modules', 'wanderlaw'), 'dir');
  symlinkSync(join(ROOT, 'datasets'), join(WORK, 'tree', 'datasets'), 'dir');
  const kernel = {
    argv: [KERNEL, 'kernel', '--config-path', '{connection_file}'],
    display_name: 'TypeScript',
    language: 'typescript',
  };
  writeFileSync(join(WORK, 'kernels', 'tslab', 'kernel.json'), JSON.stringify(kernel));
}

function executeNotebook(file: string): Notebook {
  const path = join(WORK, 'tree', 'notebooks', file);
  writeFileSync(path, readFileSync(join(ROOT, 'notebooks', file)));
  const { status, stderr, error } = spawnSync(
    'jupyter',
    ['nbconvert', '--to', 'notebook', '--execute', '--inplace', '--ExecutePreprocessor.timeout=600', path],
    { env: { ...process.env, JUPYTER_PATH: WORK }, encoding: 'utf8' },
  );
  if (error)
    throw new Error(`jupyter does not run (${error.message}); notebooks/README.md says what to install`);
  if (status !== 0) throw new Error(`${file} failed:\n${stderr}`);
  return JSON.parse(readFileSync(path, 'utf8')) as Notebook;
}

/** Text as Jupyter stores it: one string a line, line ends included. */
function splitLines(text: string): string[] {
  return text.split(/(?<=\n)/);
}

const joinText = (text: unknown): string => (Array.isArray(text) ? text.join('') : String(text));

/** Neighbouring pieces of what was printed as one; pictures as they are; without what changes from run to run. */
function tidyOutputs(outputs: readonly Record<string, unknown>[]): Record<string, unknown>[] {
  const tidy: Record<string, unknown>[] = [];
  for (const output of outputs) {
    if (output.output_type === 'stream') {
      if (output.name !== 'stdout') throw new Error(`a cell complains: ${joinText(output.text)}`);
      const last = tidy.at(-1);
      if (last?.output_type === 'stream') last.text = splitLines(joinText(last.text) + joinText(output.text));
      else tidy.push({ output_type: 'stream', name: 'stdout', text: splitLines(joinText(output.text)) });
    } else {
      const data = output.data as Record<string, unknown>;
      const svg = splitLines(joinText(data['image/svg+xml']));
      tidy.push({ output_type: 'display_data', data: { 'image/svg+xml': svg }, metadata: {} });
    }
  }
  return tidy;
}

function storeNotebook(file: string, executed: Notebook): void {
  const path = join(ROOT, 'notebooks', file);
  const stored = JSON.parse(readFileSync(path, 'utf8')) as Notebook;
  let count = 0;
  stored.cells.forEach((cell, i) => {
    if (cell.cell_type !== 'code') return;
    cell.execution_count = ++count;
    cell.outputs = tidyOutputs(executed.cells[i].outputs ?? []);
  });
  writeFileSync(`${path}.partial`, `${JSON.stringify(stored, null, 1)}\n`);
  renameSync(`${path}.partial`, path);
}

const wanted = process.argv.slice(2);
const files = readdirSync(join(ROOT, 'notebooks')).filter((file) => file.endsWith('.ipynb'));
prepareWorkplace();
for (const file of wanted.length > 0 ? wanted : files) {
  storeNotebook(file, executeNotebook(file));
  console.log(`${file}: stored`);
}
rmSync(WORK, { recursive: true, force: true });
