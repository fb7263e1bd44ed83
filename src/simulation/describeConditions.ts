/** Findings about the standing conditions of a scenario, in sentences that name field, number and place. */

import type { Scenario, Standing } from '../documents/Scenario.js';
import { formatUnit, type Quantity } from '../units.js';
import type { BathName, BathRange } from './bathRange.js';
import type { ConfinementFinding } from './confinement.js';
import { assessSmoothness } from './smoothness.js';

export type Condition = Standing['conditions'][number];

const TOLERATED_DRAWS = 0.05; // share of coefficient draws that may break a condition which the best values keep

const QUANTITIES: Readonly<Record<BathName, Quantity>> = {
  friction: 'friction',
  noise: 'noise',
  diffusion: 'diffusion',
};

/** Smallest eigenvalue of friction, noise or diffusion above zero, at the best coefficients and in the draws. */
export function describePositive(
  scenario: Scenario,
  name: BathName,
  range: BathRange,
  failingDraws: number,
): Condition {
  const { value, place } = range.least;
  const isMatrix = scenario.coefficients[name]?.form === 'matrix';
  const number = `${withUnit(scenario, value, QUANTITIES[name])} ${describePlace(scenario, place)}`;
  const what = isMatrix ? 'smallest eigenvalue' : 'smallest value';
  const base = {
    name: name === 'friction' ? 'friction-positive' : `${name}-full-rank`,
    title:
      name === 'friction'
        ? 'the symmetric part of the friction is positive definite'
        : `the ${name} has full rank`,
    value: finite(value),
    place,
  };
  if (!(value > 0)) {
    const taken = value < 0 ? ', taken as zero in a simulation' : '';
    return { ...base, verdict: 'fails', note: `coefficients.${name}: the ${what} is ${number}${taken}` };
  }
  if (failingDraws > TOLERATED_DRAWS) {
    const share = `${Math.round(100 * failingDraws)} %`;
    return {
      ...base,
      verdict: 'unknown',
      note: `coefficients.${name}: the ${what} is ${number}, but in ${share} of the coefficient draws it is not positive somewhere`,
    };
  }
  return {
    ...base,
    verdict: range.farOut === 'known' ? 'holds' : 'unknown',
    note: `coefficients.${name}: the ${what} is ${number}${howFar(scenario, range)}`,
  };
}

/** Largest value of friction, noise or diffusion. */
export function describeBounded(scenario: Scenario, name: BathName, range: BathRange): Condition {
  const number = `${withUnit(scenario, range.most, QUANTITIES[name])} ${describePlace(scenario, range.mostPlace)}`;
  const isFinite = Number.isFinite(range.most) && !range.isGrowing;
  return {
    name: `${name}-bounded`,
    title: `the ${name} is bounded`,
    verdict: !isFinite ? 'fails' : range.farOut === 'known' ? 'holds' : 'unknown',
    value: finite(range.most),
    place: [...range.mostPlace],
    note: `coefficients.${name}: the largest value is ${number}${range.isGrowing ? ' and growing with the distance' : isFinite ? howFar(scenario, range) : ''}`,
  };
}

/** The friction's infimum, which may lie infinitely far out. */
export function describeAwayFromZero(scenario: Scenario, range: BathRange): Condition {
  const { value, place } = range.least;
  const fails = !(value > 0) || range.isVanishing;
  const number = `${withUnit(scenario, value, 'friction')} ${describePlace(scenario, place)}`;
  return {
    name: 'friction-away-from-zero',
    title: 'the friction stays away from zero',
    verdict: fails ? 'fails' : range.farOut === 'known' ? 'holds' : 'unknown',
    value: finite(value),
    place,
    note: `coefficients.friction: it falls to ${number}${range.isVanishing ? ' and on towards zero with the distance' : value > 0 ? howFar(scenario, range) : ''}`,
  };
}

function howFar(scenario: Scenario, { farOut, distance }: BathRange): string {
  if (farOut === 'known') return '';
  return `, as far as was probed (distance ${withUnit(scenario, distance, 'position')}); beyond that a formula cannot be told`;
}

/** The force or drift on open axes, far out. */
export function describeConfinement(scenario: Scenario, finding: ConfinementFinding): Condition {
  const isSecond = scenario.order === 'second';
  const name = isSecond ? 'force' : 'drift';
  const amount = (): string =>
    finding.value === null ? '' : withUnit(scenario, finding.value, isSecond ? 'force' : 'drift');
  const rate = finding.value === null ? '' : short(finding.value);
  const place = finding.place === null ? '' : describePlace(scenario, finding.place);
  const note = ((): string => {
    switch (finding.kind) {
      case 'closed':
        return 'axes: every axis is periodic or has walls';
      case 'stiffness':
        return `continuation.stiffness: a restoring ${name} of ${rate} per length beyond the box outweighs the constants there`;
      case 'fade':
        return `continuation: the ${name} fades to a constant, which cannot lead back from both sides; give a stiffness, or confine`;
      case 'faces':
        return finding.verdict === 'holds'
          ? `coefficients.${name}: held outside the box, it points inward on every face, weakest with ${amount()} ${place}`
          : `coefficients.${name}: held outside the box, it does not point inward ${place} (inward component ${amount()}); confine, or close the axis`;
      case 'coupled':
        return `coefficients.friction: the force points inward on every face (weakest with ${amount()} ${place}), but off-diagonal friction may outweigh it; confine to be sure`;
      case 'linear':
        return `coefficients.${name}: linear, its weakest restoring part is ${rate} per length`;
      case 'stirred':
        return `coefficients.force: linear and restoring, but its stirring part (${rate} per length) may be too strong for the friction`;
      case 'distance':
        return finding.verdict === 'fails'
          ? `coefficients.${name}: it does not point inward ${place} (inward component ${amount()})`
          : `coefficients.${name}: inward at every place probed far out (weakest with ${amount()} ${place}); beyond that a formula cannot be told`;
    }
  })();
  return {
    name: `confining-${name}`,
    title: `the ${name} leads back from large distances`,
    verdict: finding.verdict,
    value: finite(finding.value),
    place: finding.place === null ? null : [...finding.place],
    note,
  };
}

/** What formulas and the edge of the box leave of smoothness. */
export function describeSmoothness(scenario: Scenario): Condition {
  const { verdict, field, word } = assessSmoothness(scenario);
  const isHeld = scenario.visited !== null && scenario.axes.some(({ kind }) => kind === 'open');
  return {
    name: 'smooth-coefficients',
    title: 'the coefficients are smooth',
    verdict,
    value: null,
    place: null,
    note:
      verdict === 'holds'
        ? `coefficients: continuous with bounded slopes${isHeld ? ', bent at the edge of the visited box' : ''}`
        : verdict === 'fails'
          ? `${field}: ${word} jumps`
          : `${field}: whether ${word} meets a singular place cannot be told`,
  };
}

function finite(value: number | null): number | null {
  return value !== null && Number.isFinite(value) ? value : null;
}

function short(value: number): string {
  return String(Number(value.toPrecision(4)));
}

function withUnit(scenario: Scenario, value: number, quantity: Quantity): string {
  const unit = formatUnit(quantity, scenario.units);
  return unit === '' ? short(value) : `${short(value)} ${unit}`;
}

function describePlace({ visited, axes }: Scenario, place: readonly number[]): string {
  const parts = place.map((value, axis) => `${'xyz'[axis]} = ${short(value)}`).join(', ');
  let where = '';
  place.forEach((value, a) => {
    if (visited === null || axes[a].kind !== 'open') return;
    const [low, high] = [visited.low[a], visited.high[a]];
    if (value < low || value > high) where = ' (in the continuation)';
    else if ((value === low || value === high) && where === '') where = ' (at the edge, and held beyond it)';
  });
  return `at ${parts}${where}`;
}
