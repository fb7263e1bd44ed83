/** The circulation of force or drift: where its curl can be told from zero, no potential can be behind it. */

import { evaluateCurl } from '../../uncertainty/evaluateCurl.js';
import { formatPercent, formatQuantity } from '../format.js';
import { type Html, html } from '../html.js';
import type { QuantityPart } from './coefficientParts.js';
import { drawValueMap } from './planeMaps.js';
import { evaluatePlane, listPlanes, type PageContext } from './Section.js';

interface PlaneCurl {
  readonly picture: Html;
  /** Visited cells, and those whose interval excludes zero. */
  readonly visited: number;
  readonly distinct: number;
  readonly largest: number;
}

function drawPlaneCurl(context: PageContext, part: QuantityPart, axes: [number, number]): PlaneCurl {
  const { fit, coordinates } = context;
  const quantity = part.quantity === 'force' ? 'forceCurl' : 'driftCurl';
  const plane = evaluatePlane(context, ...axes);
  const { values, low, high } = evaluateCurl(fit, plane.places, ...axes);
  const isDistinct = (i: number) => (low[i] ?? 0) > 0 || (high[i] ?? 0) < 0;
  const cells = Array.from(values.keys()).filter((i) => plane.grid.visited[i] === 1);
  const distinct = cells.filter(isDistinct);
  const picture = drawValueMap(
    context,
    {
      file: 'curl',
      name: `curl of the ${part.quantity}`,
      quantity,
      values,
      low,
      high,
      uncertainty: { grade: (i) => (isDistinct(i) ? 0 : 2), light: '', heavy: 'could be zero' },
      note: `Positive: turning from ${coordinates[axes[0]]} towards ${coordinates[axes[1]]}.`,
    },
    plane,
    axes,
  );
  const largest = distinct.reduce(
    (most, i) => (Math.abs(values[i] ?? 0) > Math.abs(most) ? (values[i] ?? 0) : most),
    0,
  );
  return { picture, visited: cells.length, distinct: distinct.length, largest };
}

/** Maps of the curl with a verdict in words; nothing in one dimension, where every force has a potential. */
export function drawCirculation(context: PageContext, part: QuantityPart): Html | null {
  const { fit, units } = context;
  const planes = listPlanes(fit.data.dimensions).map((axes) => drawPlaneCurl(context, part, axes));
  const visited = planes.reduce((sum, plane) => sum + plane.visited, 0);
  if (visited === 0) return null;
  const share = planes.reduce((sum, plane) => sum + plane.distinct, 0) / visited;
  const expected = 1 - fit.uncertainty.confidence;
  const quantity = part.quantity === 'force' ? 'forceCurl' : 'driftCurl';
  const largest = planes.reduce(
    (most, plane) => (Math.abs(plane.largest) > Math.abs(most) ? plane.largest : most),
    0,
  );
  // Neighbouring cells share their errors, so a share somewhat above the expected one is no finding.
  const verdict =
    share > 4 * expected
      ? html`<strong>The ${part.quantity} turns.</strong> Its curl can be told from zero in ${formatPercent(share)} of the visited cells
(${formatPercent(expected)} would be expected by chance) and reaches ${formatQuantity(largest, quantity, units)}: a particle led around
a loop gains or loses energy, and no potential alone can be behind such motion.`
      : html`<strong>No circulation was found.</strong> The curl can be told from zero in ${formatPercent(share)} of the visited cells, where
${formatPercent(expected)} would be expected by chance: the ${part.quantity} may have a potential.`;
  const caution =
    part.quantity === 'drift'
      ? html` With a diffusion that varies, a drift without curl is not yet that of equilibrium.`
      : null;
  const words = html`<p>${verdict}${caution}</p>`;
  const pictures = planes.map(({ picture }) => picture);
  return planes.length === 1
    ? html`<h3>Circulation</h3><div class="trio beside">${pictures}<div>${words}</div></div>`
    : html`<h3>Circulation</h3>${words}<div class="pictures">${pictures}</div>`;
}
