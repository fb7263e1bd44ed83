/** Notebooks are well-formed, and their cells run and print what is stored beside them. */

import { execFileSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import ts from 'typescript';
import { describe, expect, test } from 'vitest';
import { z } from 'zod';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const NOTEBOOKS = readdirSync(`${ROOT}/notebooks`).filter((file) => file.endsWith('.ipynb'));

// The notebook format 4.5: what this project uses of it.
const id = z.string().regex(/^[a-zA-Z0-9-_]{1,64}$/);
const source = z.array(z.string());
const stream = z.strictObject({ output_type: z.literal('stream'), name: z.literal('stdout'), text: source });
const picture = z.strictObject({
  output_type: z.literal('display_data'),
  data: z.strictObject({ 'image/svg+xml': source }),
  metadata: z.strictObject({}),
});
const cell = z.discriminatedUnion('cell_type', [
  z.strictObject({ cell_type: z.literal('markdown'), id, metadata: z.strictObject({}), source }),
  z.strictObject({
    cell_type: z.literal('code'),
    id,
    /** `library`: the cell calls the public library, whose last digits may move from version to version. */
    metadata: z.strictObject({ tags: z.array(z.literal('library')).optional() }),
    execution_count: z.int().positive(),
    outputs: z.array(z.discriminatedUnion('output_type', [stream, picture])),
    source,
  }),
]);
const notebookSchema = z.strictObject({
  cells: z.array(cell).min(1),
  metadata: z.looseObject({ kernelspec: z.looseObject({ language: z.literal('typescript') }) }),
  nbformat: z.literal(4),
  nbformat_minor: z.literal(5),
});

const MARK = '\u0001cell '; // no cell prints it
const DRAWN = '\u0001picture\n';

/** Stands in for what the Jupyter kernel offers to draw with. */
const DISPLAY = `const display = { svg: (text) => process.stdout.write(text.startsWith('<svg ') ? ${JSON.stringify(DRAWN)} : text) };`;

/** Runs the code cells one after the other in one module and returns what each printed and drew. */
function runCells(cells: readonly z.output<typeof cell>[]): Map<string, string> {
  const code = cells
    .filter(({ cell_type }) => cell_type === 'code')
    .map(({ id, source }) => `console.log(${JSON.stringify(MARK + id)});\n${source.join('')}`)
    .join('\n')
    .replace("import { display } from 'tslab';", DISPLAY);
  const { outputText } = ts.transpileModule(code, {
    compilerOptions: { module: ts.ModuleKind.ESNext, target: ts.ScriptTarget.ES2023 },
  });
  const printed = execFileSync(process.execPath, ['--input-type=module', '--eval', outputText], {
    cwd: `${ROOT}/notebooks`,
    encoding: 'utf8',
    maxBuffer: 1e8,
  });
  const parts = printed.split(MARK).slice(1);
  return new Map(
    parts.map((part) => [part.slice(0, part.indexOf('\n')), part.slice(part.indexOf('\n') + 1)] as const),
  );
}

describe.each(NOTEBOOKS)('%s', (file) => {
  const parsed: unknown = JSON.parse(readFileSync(`${ROOT}/notebooks/${file}`, 'utf8'));
  const { cells } = notebookSchema.parse(parsed);

  test('cells have names of their own', () => {
    expect(new Set(cells.map((each) => each.id)).size).toBe(cells.length);
  });

  test('every cell runs, and the self-contained ones print what is stored', { timeout: 300_000 }, () => {
    const printed = runCells(cells);
    for (const each of cells) {
      if (each.cell_type !== 'code') continue;
      const stored = each.outputs
        .map((output) => (output.output_type === 'stream' ? output.text.join('') : DRAWN))
        .join('');
      const found = printed.get(each.id) ?? '';
      if (each.metadata.tags?.includes('library')) expect(outlineOf(found), each.id).toBe(outlineOf(stored));
      else expect(found, each.id).toBe(stored);
    }
  });
});

/** What stays the same from version to version: where something is printed, and where drawn. */
function outlineOf(output: string): string {
  return output
    .split(DRAWN)
    .map((text) => (text.trim() === '' ? '' : 'text'))
    .join(' picture ');
}
