/**
 * From the syntax tree of a formula to a JavaScript expression: every node is checked against a list of what is allowed,
 * and the expression is made of the writer's own words only.
 */

import { suggestName } from '../numerics/text/suggestName.js';
import { refuse } from './refuseFormula.js';

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
export const CONSTANTS: ReadonlyMap<string, number> = new Map([
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

/** What needs to be known of a parser's node. */
export interface SyntaxNode {
  readonly type: string;
  readonly name?: string;
  readonly value?: unknown;
  readonly fn?: string | SyntaxNode;
  readonly args?: readonly SyntaxNode[];
  readonly content?: SyntaxNode;
}

export interface ResolvedNames {
  readonly coordinates: readonly string[];
  readonly parameters: readonly string[];
}

export interface Writer {
  nodes: number;
  readonly maxNodes: number;
  readonly text: string;
  readonly names: ResolvedNames;
}

/** The generated expression of a checked node; refuses every node that is not on the list. */
export function writeNode(node: SyntaxNode, writer: Writer): string {
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
    return refuse(
      text,
      value === undefined ? 'is empty' : `holds ${JSON.stringify(value)}`,
      'use numbers and names only',
      1,
    );
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
  const near = suggestName(name, known);
  const place = findName(text, name);
  const advice = near ? `did you mean ${near}? (${known.join(', ')})` : `use one of ${known.join(', ')}`;
  refuse(text, `uses ${name}${place > 0 ? ` at character ${place}` : ''}, which ${why}`, advice, place, name);
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
