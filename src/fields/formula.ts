/**
 * Formulas of place: text such as `g0 * (1 + a * tanh(x / w))` read into a fast function of the coordinates and of
 * named parameters. The text is parsed, every node is checked against a list of what is allowed, and a function is
 * generated from the checked tree alone; nothing of the user's text is ever run. The language has numbers,
 * coordinates, parameters, + − * / ^, parentheses and elementary functions: no loops, no names from outside.
 */

import { UsageError } from '../errors.js';

export interface FormulaNames {
  /** Names of the coordinates, in the order of the places handed to `evaluate`. */
  readonly coordinates: readonly string[];
  /** Names the formula may use as parameters; `free`: every other name becomes a parameter. */
  readonly parameters: readonly string[] | 'free';
}

export interface Formula {
  readonly text: string;
  readonly coordinates: readonly string[];
  /** Parameter names in the order `evaluate` takes them: the given list, or as met in the text where free. */
  readonly parameters: readonly string[];
  /**
   * The value at `places[offset … offset + d − 1]`; NaN or infinite where the formula is (a root of a negative
   * number, a division by zero).
   */
  evaluate(places: ArrayLike<number>, offset: number, parameters: ArrayLike<number>): number;
  /**
   * The derivative by a coordinate or parameter, as a formula of the same names.
   *
   * @throws UsageError  where a function in it has no derivative rule (sign, min, max, atan2, hypot)
   */
  differentiate(name: string): Formula;
}

/** Reads formulas; made by `loadFormulaReader`, because the parser takes most of a second to load. */
export type FormulaReader = (text: string, names: FormulaNames) => Formula;

const MAX_LENGTH = 1000; // characters; a law on one line has less than a hundred
const MAX_DEPTH = 40; // nested parentheses
const MAX_NODES = 400;
const MAX_DERIVATIVE_NODES = 20_000; // derivatives of derivatives grow fast
const MAX_SIMPLIFIED_NODES = 60; // simplifying large trees takes seconds

/** The functions of a formula: how many arguments, and the generated expression of their arguments. */
const FUNCTIONS: ReadonlyMap<
  string,
  { readonly counts: readonly number[]; write(args: readonly string[]): string }
> = new Map([
  ...['sqrt', 'cbrt', 'exp', 'log10', 'abs', 'sign'].map(plain),
  ...['sin', 'cos', 'tan', 'asin', 'acos', 'atan', 'sinh', 'cosh', 'tanh', 'asinh', 'acosh', 'atanh'].map(
    plain,
  ),
  [
    'log',
    {
      counts: [1, 2],
      write: ([x, base]) => (base ? `(Math.log(${x})/Math.log(${base}))` : `Math.log(${x})`),
    },
  ],
  ['pow', { counts: [2], write: ([x, y]) => `Math.pow(${x},${y})` }],
  ['sec', { counts: [1], write: ([x]) => `(1/Math.cos(${x}))` }],
  ['csc', { counts: [1], write: ([x]) => `(1/Math.sin(${x}))` }],
  ['cot', { counts: [1], write: ([x]) => `(1/Math.tan(${x}))` }],
  ['sech', { counts: [1], write: ([x]) => `(1/Math.cosh(${x}))` }],
  ['csch', { counts: [1], write: ([x]) => `(1/Math.sinh(${x}))` }],
  ['coth', { counts: [1], write: ([x]) => `(1/Math.tanh(${x}))` }],
  ['atan2', { counts: [2], write: (args) => `Math.atan2(${args.join()})` }],
  ['min', { counts: [2, 3, 4], write: (args) => `Math.min(${args.join()})` }],
  ['max', { counts: [2, 3, 4], write: (args) => `Math.max(${args.join()})` }],
  ['hypot', { counts: [2, 3], write: (args) => `Math.hypot(${args.join()})` }],
]);

function plain(name: string): [string, { counts: number[]; write(args: readonly string[]): string }] {
  return [name, { counts: [1], write: ([x]) => `Math.${name}(${x})` }];
}

/** Numbers with a name; a parameter of the same name wins. */
const CONSTANTS: ReadonlyMap<string, number> = new Map([
  ['pi', Math.PI],
  ['e', Math.E],
]);

const OPERATORS: ReadonlyMap<string, string> = new Map([
  ['add', '+'],
  ['subtract', '-'],
  ['multiply', '*'],
  ['divide', '/'],
]);

/** Node types the parser knows and formulas do not, in words. */
const REFUSED_NODES: Readonly<Record<string, string>> = {
  AccessorNode: 'a property access (.)',
  ArrayNode: 'a list ([ ])',
  AssignmentNode: 'an assignment (=)',
  BlockNode: 'several statements (; or line ends)',
  ConditionalNode: 'a condition (? :)',
  FunctionAssignmentNode: 'a function definition (=)',
  IndexNode: 'an index',
  ObjectNode: 'an object ({ })',
  RangeNode: 'a range (:)',
  RelationalNode: 'a comparison',
};

/** What this module needs to know of a parser's node. */
interface SyntaxNode {
  readonly type: string;
  readonly name?: string;
  readonly value?: unknown;
  readonly fn?: string | SyntaxNode;
  readonly args?: readonly SyntaxNode[];
  readonly content?: SyntaxNode;
}

/** The two functions of the parser library that are used. */
interface Syntax {
  parse(text: string): SyntaxNode;
  derivative(node: SyntaxNode, name: string, options: { simplify: boolean }): SyntaxNode;
}

let loading: Promise<FormulaReader> | null = null;

/** Loads the parser once and gives the reader of formulas. */
export function loadFormulaReader(): Promise<FormulaReader> {
  loading ??= import('mathjs/number').then((library) => {
    const syntax = library as unknown as Syntax;
    return (text, names) => parseFormula(syntax, text, names);
  });
  return loading;
}

/**
 * Reads one formula.
 *
 * @throws UsageError  naming what is wrong, where in the text, and what is allowed
 */
function parseFormula(syntax: Syntax, text: string, names: FormulaNames): Formula {
  if (text.trim() === '')
    throw new UsageError('the formula is empty; write one such as g0*(1+a*tanh(x))', { formula: text });
  if (text.length > MAX_LENGTH) {
    throw new UsageError(
      `the formula is ${text.length} characters long; at most ${MAX_LENGTH} are read, so write it shorter`,
      { length: text.length },
    );
  }
  checkDepth(text);
  let root: SyntaxNode;
  try {
    root = syntax.parse(text);
  } catch (error) {
    const reason = error instanceof Error ? error.message : String(error);
    const at = /\(char (\d+)\)/.exec(reason);
    refuse(
      text,
      `cannot be read${at ? ` at character ${at[1]}` : ''}: ${lowerFirst(reason.replace(/\s*\(char \d+\)/, ''))}`,
      'check parentheses and operators',
      at ? Number(at[1]) : 0,
    );
  }
  return createFormula(syntax, text, root, resolveNames(text, root, names), MAX_NODES);
}

/** Parentheses are counted before parsing, so that no text can exhaust the parser's stack. */
function checkDepth(text: string): void {
  let depth = 0;
  for (let i = 0; i < text.length; i++) {
    if (text[i] === '(' || text[i] === '[' || text[i] === '{') depth++;
    if (text[i] === ')' || text[i] === ']' || text[i] === '}') depth--;
    if (depth > MAX_DEPTH) {
      refuse(text, `is nested more than ${MAX_DEPTH} deep at character ${i + 1}`, 'write it flatter', i + 1);
    }
  }
}

interface ResolvedNames {
  readonly coordinates: readonly string[];
  readonly parameters: readonly string[];
}

function resolveNames(text: string, root: SyntaxNode, names: FormulaNames): ResolvedNames {
  const { coordinates } = names;
  if (names.parameters !== 'free') return { coordinates, parameters: names.parameters };
  const parameters: string[] = [];
  let budget = MAX_NODES;
  const visit = (node: SyntaxNode): void => {
    if (budget-- <= 0) refuse(text, `has more than ${MAX_NODES} terms`, 'write it shorter', 1);
    if (node.type === 'SymbolNode' && node.name !== undefined) {
      const known =
        coordinates.includes(node.name) || CONSTANTS.has(node.name) || parameters.includes(node.name);
      if (!known) parameters.push(node.name);
    }
    node.args?.forEach(visit);
    if (node.content) visit(node.content);
  };
  visit(root);
  return { coordinates, parameters };
}

function createFormula(
  syntax: Syntax,
  text: string,
  root: SyntaxNode,
  names: ResolvedNames,
  maxNodes: number,
): Formula {
  const writer = { nodes: 0, maxNodes, text, names };
  const body = writeNode(root, writer);
  // The body is made of the writer's own words only: numbers, indexed arguments, operators and Math functions.
  const evaluate = new Function('q', 'o', 'p', `"use strict";return ${body};`) as Formula['evaluate'];
  return {
    text,
    coordinates: names.coordinates,
    parameters: names.parameters,
    evaluate,
    differentiate(name) {
      if (!names.coordinates.includes(name) && !names.parameters.includes(name)) {
        const known = [...names.coordinates, ...names.parameters].join(', ');
        throw new UsageError(
          `the formula "${text}" has no variable ${name} to differentiate by; it knows ${known}`,
          {
            formula: text,
            name,
          },
        );
      }
      let derived: SyntaxNode;
      try {
        derived = syntax.derivative(root, name, { simplify: writer.nodes <= MAX_SIMPLIFIED_NODES });
      } catch (error) {
        const reason = error instanceof Error ? lowerFirst(error.message) : String(error);
        throw new UsageError(
          `the formula "${text}" has no derivative by ${name} (${reason}); use smooth functions such as tanh or exp`,
          { formula: text, name },
        );
      }
      return createFormula(syntax, `d/d${name} [${text}]`, derived, names, MAX_DERIVATIVE_NODES);
    },
  };
}

interface Writer {
  nodes: number;
  readonly maxNodes: number;
  readonly text: string;
  readonly names: ResolvedNames;
}

/** The generated expression of a checked node; refuses every node that is not on the list. */
function writeNode(node: SyntaxNode, writer: Writer): string {
  const { text } = writer;
  if (++writer.nodes > writer.maxNodes) {
    refuse(text, `has more than ${writer.maxNodes} terms`, 'write it shorter', 1);
  }
  switch (node.type) {
    case 'ConstantNode':
      return writeNumber(node.value, text);
    case 'SymbolNode':
      return writeName(node.name ?? '', writer);
    case 'ParenthesisNode':
      return node.content
        ? writeNode(node.content, writer)
        : refuse(text, 'has empty parentheses', 'fill them', 1);
    case 'OperatorNode':
      return writeOperator(node, writer);
    case 'FunctionNode':
      return writeCall(node, writer);
    default:
      return refuse(
        text,
        `holds ${REFUSED_NODES[node.type] ?? `something that is no part of formulas (${node.type})`}`,
        'use numbers, names, + - * / ^, parentheses and elementary functions',
        1,
      );
  }
}

function writeNumber(value: unknown, text: string): string {
  if (typeof value !== 'number')
    return refuse(text, `holds ${JSON.stringify(value)}`, 'use numbers and names only', 1);
  if (!Number.isFinite(value))
    return refuse(text, `holds a number that is not finite (${value})`, 'use finite numbers', 1);
  return value < 0 ? `(${value})` : String(value);
}

function writeName(name: string, { names, text }: Writer): string {
  const coordinate = names.coordinates.indexOf(name);
  if (coordinate >= 0) return coordinate === 0 ? 'q[o]' : `q[o+${coordinate}]`;
  const parameter = names.parameters.indexOf(name);
  if (parameter >= 0) return `p[${parameter}]`;
  const constant = CONSTANTS.get(name);
  if (constant !== undefined) return String(constant);
  const known = [...names.coordinates, ...names.parameters, ...CONSTANTS.keys()];
  return refuseName(
    text,
    name,
    FUNCTIONS.has(name) ? 'is a function and needs arguments' : 'is not known',
    known,
  );
}

function writeOperator(node: SyntaxNode, writer: Writer): string {
  const args = (node.args ?? []).map((argument) => writeNode(argument, writer));
  const name = String(node.fn);
  const operator = OPERATORS.get(name);
  if (operator !== undefined && args.length === 2) return `(${args[0]}${operator}${args[1]})`;
  if (name === 'pow' && args.length === 2) return writePower(args[0], args[1]);
  if (name === 'unaryMinus') return `(-${args[0]})`;
  if (name === 'unaryPlus') return args[0];
  return refuse(writer.text, `uses the operator ${name}`, 'use + - * / ^', 1);
}

/** Squares and cubes of plain names are multiplied out: several times faster than the general power. */
function writePower(base: string, exponent: string): string {
  if (/^[qp]\[[^[\]]*\]$/.test(base)) {
    if (exponent === '2') return `(${base}*${base})`;
    if (exponent === '3') return `(${base}*${base}*${base})`;
  }
  return `Math.pow(${base},${exponent})`;
}

function writeCall(node: SyntaxNode, writer: Writer): string {
  const { text } = writer;
  const called = typeof node.fn === 'object' ? node.fn : undefined;
  if (called === undefined || called.type !== 'SymbolNode' || called.name === undefined) {
    return refuse(
      text,
      'calls something that is not a plain function',
      `use ${[...FUNCTIONS.keys()].join(', ')}`,
      1,
    );
  }
  const entry = FUNCTIONS.get(called.name);
  if (entry === undefined)
    return refuseName(text, called.name, 'is not a function of formulas', [...FUNCTIONS.keys()]);
  const args = node.args ?? [];
  if (!entry.counts.includes(args.length)) {
    const wanted = entry.counts.join(' or ');
    return refuse(
      text,
      `gives ${called.name} ${args.length} arguments`,
      `${called.name} takes ${wanted}`,
      findName(text, called.name),
    );
  }
  return entry.write(args.map((argument) => writeNode(argument, writer)));
}

function refuseName(text: string, name: string, why: string, known: readonly string[]): never {
  const near = nearest(name, known);
  const place = findName(text, name);
  const advice = near ? `did you mean ${near}? (${known.join(', ')})` : `use one of ${known.join(', ')}`;
  refuse(text, `uses ${name}${place > 0 ? ` at character ${place}` : ''}, which ${why}`, advice, place, name);
}

function refuse(text: string, what: string, advice: string, character: number, name = ''): never {
  const shown = text.length > 80 ? `${text.slice(0, 77)}...` : text;
  throw new UsageError(`the formula "${shown}" ${what}; ${advice}`, { formula: text, character, name });
}

/** Character (counted from 1) at which a name stands as a word of its own; 0 where it does not. */
function findName(text: string, name: string): number {
  const isWord = (letter: string | undefined): boolean =>
    letter !== undefined && /[\p{L}\p{N}_]/u.test(letter);
  for (let at = text.indexOf(name); at >= 0; at = text.indexOf(name, at + 1)) {
    if (!isWord(text[at - 1]) && !isWord(text[at + name.length])) return at + 1;
  }
  return 0;
}

/** The known word within two edits of a mistyped one, or null. */
function nearest(word: string, known: readonly string[]): string | null {
  let best: string | null = null;
  let bestDistance = Math.min(3, word.length);
  for (const candidate of known) {
    const distance = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (distance < bestDistance) {
      best = candidate;
      bestDistance = distance;
    }
  }
  return best;
}

/** Insertions, deletions, replacements and swaps of neighbours between two words (Damerau 1964); swaps count a little less, being the commonest slip. */
function editDistance(a: string, b: string): number {
  let before: number[] = [];
  let previous = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      row[j] = Math.min(previous[j] + 1, row[j - 1] + 1, previous[j - 1] + (a[i - 1] === b[j - 1] ? 0 : 1));
      const swapped = i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1];
      if (swapped) row[j] = Math.min(row[j], before[j - 2] + 0.9);
    }
    before = previous;
    previous = row;
  }
  return previous[b.length];
}

function lowerFirst(text: string): string {
  return text.charAt(0).toLowerCase() + text.slice(1);
}
