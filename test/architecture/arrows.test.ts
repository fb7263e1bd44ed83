/** The folders of src depend on one another one way only, and only the outermost touch the machine. */

import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';

const SRC = fileURLToPath(new URL('../../src', import.meta.url));

const ARITHMETIC = ['numerics', 'tracks', 'momenta', 'fields'];
const STAGES = [
  ...ARITHMETIC,
  'documents',
  'estimation',
  'uncertainty',
  'hypotheses',
  'simulation',
  'checks',
];

/** Folder → folders it may import from, besides itself and the two top-level files below. */
const ALLOWED: Readonly<Record<string, readonly string[]>> = {
  numerics: [],
  tracks: ['numerics'],
  import: ['numerics', 'tracks'],
  momenta: ['numerics', 'tracks'],
  fields: ['numerics', 'tracks', 'momenta'],
  documents: ['fields'],
  estimation: [...ARITHMETIC, 'documents'],
  uncertainty: [...ARITHMETIC, 'documents', 'estimation'],
  hypotheses: [...ARITHMETIC, 'documents', 'estimation', 'uncertainty'],
  simulation: [...ARITHMETIC, 'documents'],
  checks: [...ARITHMETIC, 'documents', 'estimation', 'uncertainty', 'simulation'],
  report: STAGES,
  'fit.ts': STAGES,
  workers: [...STAGES, 'fit.ts'],
  'index.ts': [...STAGES, 'import', 'report', 'workers', 'fit.ts'],
  cli: [...STAGES, 'import', 'report', 'workers', 'fit.ts', 'index.ts'],
};

/** Top-level files that everyone may import. */
const OPEN_TO_ALL = ['errors.ts', 'units.ts'];

interface SourceFile {
  /** Path below src, with forward slashes. */
  readonly path: string;
  readonly text: string;
}

const FILES: readonly SourceFile[] = readdirSync(SRC, { recursive: true, encoding: 'utf8' })
  .filter((path) => /\.(ts|mjs)$/.test(path))
  .map((path) => ({ path: path.replaceAll('\\', '/'), text: readFileSync(join(SRC, path), 'utf8') }));

/** The folder a path below src belongs to; a top-level file stands for itself. */
function folderOf(path: string): string {
  return path.split('/')[0];
}

/** What a file imports, re-exports or loads: the specifiers as written. */
function listImports(text: string): string[] {
  const code = text.replace(/\/\*[\s\S]*?\*\//g, '');
  const statements = code.matchAll(/^\s*(?:import|export)\s(?:[^'";]*?\sfrom\s)?\s*['"]([^'"]+)['"]/gm);
  const loads = code.matchAll(/\bimport\(\s*['"]([^'"]+)['"]\s*\)/g);
  return [...statements, ...loads].map((match) => match[1]);
}

/** The code without comments and without the contents of plain strings. */
function stripProse(text: string): string {
  return text
    .replace(/\/\*[\s\S]*?\*\//g, '')
    .replace(/'(?:[^'\\\n]|\\.)*'|"(?:[^"\\\n]|\\.)*"/g, "''")
    .replace(/\/\/.*$/gm, '');
}

describe('imports between the folders of src', () => {
  test('every folder and top-level file has its place in the table of arrows', () => {
    const known = new Set([...Object.keys(ALLOWED), ...OPEN_TO_ALL]);
    expect(FILES.map((file) => folderOf(file.path)).filter((folder) => !known.has(folder))).toEqual([]);
  });

  test('the table of arrows has no way round', () => {
    const order = Object.keys(ALLOWED);
    const backward = order.flatMap((folder, place) =>
      ALLOWED[folder]
        .filter((target) => order.indexOf(target) >= place)
        .map((target) => `${folder} → ${target}`),
    );
    expect(backward).toEqual([]);
  });

  test('every import follows an arrow of the table', () => {
    const wrong: string[] = [];
    for (const { path, text } of FILES) {
      const folder = folderOf(path);
      for (const specifier of listImports(text)) {
        if (!specifier.startsWith('.')) continue;
        const target = relative(SRC, join(SRC, dirname(path), specifier)).replaceAll('\\', '/');
        const targetFolder = folderOf(target).replace(/\.js$/, '.ts');
        const allowed =
          targetFolder === folder ||
          OPEN_TO_ALL.includes(targetFolder) ||
          (ALLOWED[folder]?.includes(targetFolder) ?? false);
        if (!allowed) wrong.push(`${path} imports ${specifier}`);
      }
    }
    expect(wrong).toEqual([]);
  });

  test('errors and units depend on nothing but each other', () => {
    const imports = FILES.filter((file) => OPEN_TO_ALL.includes(file.path)).flatMap((file) =>
      listImports(file.text),
    );
    expect(imports.filter((specifier) => !['./errors.js', './units.js'].includes(specifier))).toEqual([]);
  });
});

describe('the world outside', () => {
  const OUTSIDE = /\bconsole\.|\bprocess\.|\bDate\.now\b|\bnew Date\b|\bMath\.random\b|\bperformance\.now\b/g;
  const MODULES = /^(?:node:)?(?:fs|fs\/promises|process|child_process|worker_threads|os|net|http|https)$/;

  test('files, streams, the clock and unseeded randomness are met in cli and workers alone', () => {
    const wrong: string[] = [];
    for (const { path, text } of FILES) {
      if (['cli', 'workers'].includes(folderOf(path))) continue;
      for (const specifier of listImports(text))
        if (MODULES.test(specifier)) wrong.push(`${path} imports ${specifier}`);
      for (const [word] of stripProse(text).matchAll(OUTSIDE)) wrong.push(`${path} uses ${word}`);
    }
    expect(wrong).toEqual([]);
  });

  test('the search for forbidden words sees code and overlooks prose', () => {
    expect(
      stripProse("const a = Date.now(); // new Date\nlet s = 'a process. it ends';").match(OUTSIDE),
    ).toEqual(['Date.now']);
    expect(
      listImports("import fs from 'node:fs';\nimport {\n  a,\n} from './a.js';\nimport './b.js';"),
    ).toEqual(['node:fs', './a.js', './b.js']);
  });
});
