/** Where the result of a command goes: to the file of --output, or to standard output. */

import { checkOutput, writeWhole } from './files.js';
import type { Terminal } from './Terminal.js';

/** Refuses an output place that cannot be written, before the work starts; nothing to check without one. */
export function checkResultPlace(
  output: unknown,
  inputs: readonly string[],
  terminal: Terminal,
  option?: string,
): void {
  if (typeof output !== 'string') return;
  checkOutput(
    terminal.resolve(output),
    output,
    inputs.filter((path) => path !== '-').map((path) => terminal.resolve(path)),
    option,
  );
}

/** Writes a text whole to the output file and says so, or prints it. */
export async function deliver(text: string, output: unknown, terminal: Terminal): Promise<void> {
  if (typeof output !== 'string') return terminal.print(text);
  await writeWhole(terminal.resolve(output), text, output);
  terminal.note(`wrote ${output}`);
}

/** Whether the result is wanted as JSON: by --json, or by the name of the output file. */
export function wantsJson(options: Readonly<Record<string, unknown>>): boolean {
  const { json, output } = options;
  return json === true || (typeof output === 'string' && output.endsWith('.json'));
}

/** JSON for people and programs alike: indented, but lists of numbers stay on one line. */
export function formatJson(value: unknown): string {
  return `${formatValue(value, '')}\n`;
}

function formatValue(value: unknown, indent: string): string {
  const inner = `${indent}  `;
  if (value instanceof Float64Array || value instanceof Int32Array) return JSON.stringify(Array.from(value));
  if (Array.isArray(value)) {
    if (value.every((item) => typeof item !== 'object' || item === null)) return JSON.stringify(value);
    return `[\n${value.map((item) => inner + formatValue(item, inner)).join(',\n')}\n${indent}]`;
  }
  if (typeof value === 'object' && value !== null) {
    const entries = Object.entries(value).filter(([, item]) => item !== undefined);
    if (entries.length === 0) return '{}';
    const lines = entries.map(([key, item]) => `${inner}${JSON.stringify(key)}: ${formatValue(item, inner)}`);
    return `{\n${lines.join(',\n')}\n${indent}}`;
  }
  return JSON.stringify(value) ?? 'null';
}
