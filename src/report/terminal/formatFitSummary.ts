/** The fitted coefficients in short, for people at a terminal. */

import type { FitResult } from '../../documents/FitDocument.js';
import { evaluateFit } from '../../uncertainty/evaluateFit.js';
import { formatUnit } from '../../units.js';
import { drawSparkline } from '../charts/sparkline.js';
import {
  formatCount,
  formatInterval,
  formatPercent,
  formatQuantity,
  formatRange,
  joinUnit,
  tameUnits,
} from '../format.js';
import { tameText } from '../html.js';
import { listQuantities, nameComponent } from '../sections/coefficientParts.js';
import { summarizePrecision } from '../sections/precision.js';
import {
  cellCentre,
  countVisited,
  findMiddle,
  gatherVisitedPlaces,
  layLine,
} from '../sections/visitedGrid.js';
import { drawTable, writeParagraph, writeTitle } from './layout.js';
import { PLAIN_STYLE, type SummaryStyle } from './SummaryStyle.js';

/** Places along each axis for its course, by dimensions: all of them fit into 100 columns beside the numbers. */
const COURSE_WIDTHS = [24, 12, 8];

/** The coefficients in the middle of the visited region, their range over it, and their course along each axis. */
export function formatFitSummary(fit: FitResult, style: SummaryStyle = PLAIN_STYLE): string {
  const { dim } = style.colors;
  const { width } = style;
  const region = fit.visited;
  const units = tameUnits(fit.data.units);
  const coordinates = fit.data.coordinates.map((name) => tameText(name, 16));
  const middle = Float64Array.from(findMiddle(region), (number, axis) => cellCentre(region, axis, number));
  const atMiddle = evaluateFit(fit, middle).columns;
  const everywhere = evaluateFit(fit, gatherVisitedPlaces(region));
  const span = COURSE_WIDTHS[fit.data.dimensions - 1] ?? 8;
  const lines = coordinates.map((_, axis) => evaluateFit(fit, layLine(region, axis, span).places));
  const rows = listQuantities(fit.model, atMiddle).flatMap((part) =>
    part.components.map((component) => {
      const isColumn = (column: { name: string }) => column.name === component.column;
      const here = atMiddle.find(isColumn);
      const all = everywhere.columns.find(isColumn);
      const summary = all && summarizePrecision(all, everywhere.columns, everywhere.visited);
      const interval = here
        ? formatInterval(here.values[0] ?? NaN, here.low[0] ?? NaN, here.high[0] ?? NaN)
        : '';
      const range = summary ? formatRange(summary.low, summary.high, 3, ' … ') : 'nowhere visited';
      const courses = lines.map((line) =>
        drawSparkline(line.columns.find(isColumn)?.values ?? [], line.visited),
      );
      return [nameComponent(part, component), formatUnit(part.quantity, units), interval, range, ...courses];
    }),
  );
  const heads = [
    'coefficient',
    'unit',
    'in the middle',
    'over the region',
    ...coordinates.map((name) => `along ${name}`),
  ];
  const at = coordinates
    .map((name, axis) => `${name} = ${formatQuantity(middle[axis] ?? 0, 'position', units)}`)
    .join(', ');
  const reading = fit.model.order === 'first' ? ', drift in the Itô reading' : '';
  const explained = `Middle: ${at}. Intervals: ${formatPercent(fit.uncertainty.confidence)}, from ${formatCount(fit.uncertainty.blocks)} independent pieces. Visited: ${formatCount(countVisited(region))} of ${formatCount(region.counts.length)} cells.`;
  const errors = fit.localizationError.map(
    (error, axis) => `${coordinates[axis] ?? ''} ${formatInterval(error.value, error.low, error.high)}`,
  );
  const localization = `Localization error: ${joinUnit(errors.join(', '), 'position', units)}.`;
  // Narrow terminals lose the courses first, then the range.
  const table = drawTable(heads, rows, { width, rightFrom: 2, spare: coordinates.length + 1 });
  return `${writeTitle(`Model of ${fit.model.order} order${reading}`, style)}${table}${writeParagraph(explained, width, dim)}${writeParagraph(localization, width, dim)}`;
}
