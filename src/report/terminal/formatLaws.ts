/** Laws for people at a terminal: the shelf, and laws compared with each other. */

import type { ComparedLaw } from '../../hypotheses/TestResult.js';
import { formatNumber } from '../format.js';
import { tameText } from '../html.js';
import { sayP } from '../statements.js';
import { drawTable, writeFacts, writeParagraph, writeTitle } from './layout.js';
import { PLAIN_STYLE, type SummaryStyle } from './SummaryStyle.js';

/** A law that can be called by name; in its formulas `q` is the coordinate it runs along. */
export interface ListedLaw {
  readonly name: string;
  /** One formula for any coefficient, or one for each that differs. */
  readonly formula: Readonly<Record<string, string>>;
  readonly about: string;
  readonly source: string;
  readonly range: string;
}

/** Every law with its formula, source and range of validity. */
export function formatLawShelf(laws: readonly ListedLaw[], style: SummaryStyle = PLAIN_STYLE): string {
  const blocks = laws.map(({ name, formula, about, source, range }) => {
    const formulas = Object.entries(formula).map(([coefficient, text]): [string, string] => [
      coefficient === 'any' ? 'formula' : coefficient,
      tameText(text, 500),
    ]);
    const facts: [string, string][] = [
      ...formulas,
      ['valid', tameText(range, 300)],
      ['source', tameText(source, 300)],
    ];
    const title = about === '' ? name : `${name}: ${about}`;
    return (
      writeTitle(tameText(title, 200), style) +
      writeFacts(
        facts.filter(([, text]) => text !== ''),
        style.width,
      )
    );
  });
  const hint = 'q is the coordinate the law runs along: NAME:y chooses another than the usual one.';
  return `${blocks.join('\n')}\n${writeParagraph(hint, style.width, style.colors.dim)}`;
}

/** Compared laws, best first. */
export function formatComparisonSummary(
  laws: readonly ComparedLaw[],
  style: SummaryStyle = PLAIN_STYLE,
): string {
  const rows = laws.map(({ law, difference, differenceError, tie, criterion, p }, i) => [
    tameText(law, 60),
    i === 0 ? 'best' : `${formatNumber(difference, 3)} ± ${formatNumber(differenceError, 2)}`,
    i === 0 ? '' : tie ? 'tie' : 'worse',
    formatNumber(criterion, 3),
    sayP(p),
  ]);
  const head = ['law', 'predicts unseen data', '', 'criterion', 'alone'];
  const ties = laws.filter(({ tie }) => tie).length;
  const verdict =
    ties === 0
      ? 'The first law predicts blocks of data it was not fitted to better than the others.'
      : `The first law and ${ties} more predict data they were not fitted to equally well, within the error: a tie; prefer the one with fewer parameters.`;
  return `\n${writeTitle('Laws compared', style)}${drawTable(head, rows, { width: style.width, spare: 2 })}${writeParagraph(verdict, style.width, style.colors.dim)}`;
}
