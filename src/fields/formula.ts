/**
 * Formulas of place: text such as `g0 * (1 + a * tanh(x / w))` read into a fast function of the coordinates and of
 * named parameters. The text is parsed, every node is checked against a list of what is allowed, and a function is
 * generated from the checked tree alone; nothing of the user's text is ever run. The language has numbers,
 * coordinates, parameters, + − * / ^, parentheses and elementary functions: no loops, no names from outside.
 */

import { UsageError } from '../errors.js';
import { refuse } from './refuseFormula.js';
import { CONSTANTS, type ResolvedNames, type SyntaxNode, writeNode } from './writeFormula.js';

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

function lowerFirst(text: string): string {
  return text.charAt(0).toLowerCase() + text.slice(1);
}
