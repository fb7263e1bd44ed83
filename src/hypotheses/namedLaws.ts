/**
 * The shelf: laws of place that come up again and again, by name, with their source and where they are valid.
 *
 * Formulas are written in `q`, the coordinate the law runs along: the first one (x) unless a law says otherwise or the
 * user names another, as in `tanh-step:y`. Laws near a wall run along the last coordinate, with h the distance from the
 * wall to the centre of the particle, h = q − wall.
 */

import { CONCENTRATION } from './readConcentration.js';

export interface NamedLaw {
  readonly name: string;
  /** The law in words. */
  readonly about: string;
  /** The formula in q and named parameters; where friction and mobility differ, one for each. */
  readonly formula: string | { readonly friction: string; readonly diffusion: string };
  /** Which coordinate q is by default. */
  readonly along: 'first' | 'last';
  /** Parameters held unless the user says otherwise. */
  readonly fixed?: Readonly<Record<string, number>>;
  /** A column of the table that the law speaks of besides the coordinates. */
  readonly needs?: typeof CONCENTRATION;
  readonly source: string;
  readonly range: string;
}

/** Mobility parallel to a wall relative to the free one, s = radius/h. */
const PARALLEL =
  '(1 - 9/16*(radius/(q-wall)) + 1/8*(radius/(q-wall))^3 - 45/256*(radius/(q-wall))^4 - 1/16*(radius/(q-wall))^5)';

/** The same perpendicular to the wall, by the method of reflections. */
const PERPENDICULAR = '(1 - 9/8*(radius/(q-wall)) + 1/2*(radius/(q-wall))^3)';

/** Perpendicular, as a rational function of the gap g = h − radius. */
const GAP =
  '(6*(q-wall-radius)^2 + 2*radius*(q-wall-radius))/(6*(q-wall-radius)^2 + 9*radius*(q-wall-radius) + 2*radius^2)';

export const NAMED_LAWS: readonly NamedLaw[] = [
  {
    name: 'constant',
    about: 'the same everywhere',
    formula: 'c0',
    along: 'first',
    source: 'definition',
    range: 'everywhere',
  },
  {
    name: 'linear',
    about: 'a straight line along one coordinate',
    formula: 'c0 + c1*q',
    along: 'first',
    source: 'definition',
    range: 'where it stays positive, for friction, noise and diffusion',
  },
  {
    name: 'power',
    about: 'a power of one coordinate',
    formula: 'c0*q^n',
    along: 'first',
    source: 'definition',
    range: 'q > 0',
  },
  {
    name: 'exponential',
    about: 'exponential growth or decay along one coordinate',
    formula: 'c0*exp(k*q)',
    along: 'first',
    source: 'definition',
    range: 'everywhere',
  },
  {
    name: 'gaussian-bump',
    about: 'a bump or dip across one coordinate on a constant ground',
    formula: 'c0*(1 + a*exp(-(q-q0)^2/(2*w^2)))',
    along: 'first',
    source: 'definition',
    range: 'everywhere; a > −1 keeps it positive',
  },
  {
    name: 'tanh-step',
    about: 'a smooth step between two levels',
    formula: 'c0*(1 + a*tanh((q-q0)/w))',
    along: 'first',
    source: 'definition',
    range: 'everywhere; |a| < 1 keeps it positive',
  },
  {
    name: 'crowding',
    about: 'growth in proportion to a local concentration',
    formula: {
      friction: 'c0*(1 + k*concentration)',
      diffusion: 'c0/(1 + k*concentration)',
    },
    along: 'first',
    needs: CONCENTRATION,
    source:
      'first term of an expansion in the concentration, as Einstein, Ann. Phys. 19 (1906) 289, for the viscosity of suspensions (from memory)',
    range:
      'low concentrations, k × concentration well below 1; needs a column: --columns concentration=NAME in the fit',
  },
  {
    name: 'stokes',
    about: 'drag on a sphere in an unbounded viscous fluid; hold what is known with --fix',
    formula: {
      friction: '6*pi*viscosity*radius/mass',
      diffusion: 'energy/(6*pi*viscosity*radius)',
    },
    along: 'first',
    source: 'Stokes, Trans. Camb. Phil. Soc. 9 (1851) 8; Einstein, Ann. Phys. 17 (1905) 549 (from memory)',
    range: 'Reynolds number far below 1, walls many radii away; energy is the thermal energy kT',
  },
  {
    name: 'faxen-parallel',
    about: 'a sphere moving along a flat wall',
    formula: { friction: `c0/${PARALLEL}`, diffusion: `c0*${PARALLEL}` },
    along: 'last',
    fixed: { wall: 0 },
    source:
      'Faxén, Ark. Mat. Astron. Fys. 17 (1923) no. 27; Happel & Brenner, Low Reynolds Number Hydrodynamics (1983), eq. 7-4.28 (from memory)',
    range: 'h above 2.4 radii within 0.1 %, above 1.6 radii within 1 %; nearer the series breaks down',
  },
  {
    name: 'faxen-perpendicular',
    about: 'a sphere moving towards or away from a flat wall, by reflections',
    formula: { friction: `c0/${PERPENDICULAR}`, diffusion: `c0*${PERPENDICULAR}` },
    along: 'last',
    fixed: { wall: 0 },
    source:
      'Lorentz and Faxén in Happel & Brenner, Low Reynolds Number Hydrodynamics (1983), ch. 7-4 (from memory)',
    range: 'h above about 3 radii (error below 1 %); nearer take wall-perpendicular',
  },
  {
    name: 'wall-perpendicular',
    about: 'a sphere moving towards or away from a flat wall, down to contact',
    formula: { friction: `c0/(${GAP})`, diffusion: `c0*${GAP}` },
    along: 'last',
    fixed: { wall: 0 },
    source:
      'Bevan & Prieve, J. Chem. Phys. 113 (2000) 1228, a rational function close to the exact series of Brenner, Chem. Eng. Sci. 16 (1961) 242',
    range: 'every h above one radius (within 1 % of the exact series)',
  },
];

/** The formula of a shelf law for a coefficient and coordinate. */
export function writeNamedLaw(law: NamedLaw, coefficient: string, axis: string): string {
  const { formula } = law;
  const text =
    typeof formula === 'string'
      ? formula
      : coefficient === 'diffusion'
        ? formula.diffusion
        : formula.friction;
  return text.replace(/\bq\b/g, axis);
}
