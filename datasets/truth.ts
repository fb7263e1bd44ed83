/**
 * The true coefficients of the shipped data sets: what a fit of each table should find.
 *
 * Each is given twice, as a function (used by the generator and by pictures of truth against fit) and as a formula in
 * x, y and named parameters (printed into `datapackage.json`); a test holds the two together. Lengths and times are in
 * the units of the table. Friction, noise and diffusion are scalars, meaning that value times the identity.
 */

/** Formulas of a coefficient in the way scenario files write them: one per component. */
export interface TrueFormulas {
  readonly form: 'vector' | 'scalar';
  readonly formulas: readonly string[];
}

interface TruthBase {
  readonly dimensions: number;
  /** Named numbers of the formulas, in powers of the table's length and time units. */
  readonly parameters: Readonly<Record<string, number>>;
  readonly coefficients: Readonly<Record<string, TrueFormulas>>;
}

export interface SecondOrderTruth extends TruthBase {
  readonly order: 'second';
  /** Force per mass at a place (length d), length/time². */
  force(place: ArrayLike<number>): number[];
  /** 1/time. */
  friction(place: ArrayLike<number>): number;
  /** Growth rate of the velocity variance per axis, length²/time³. */
  noise(place: ArrayLike<number>): number;
}

export interface FirstOrderTruth extends TruthBase {
  readonly order: 'first';
  /** Itô drift at a place (length d), length/time. */
  drift(place: ArrayLike<number>): number[];
  /** length²/time. */
  diffusion(place: ArrayLike<number>): number;
  /** Derivative of the diffusion along x, length/time. */
  diffusionSlope(place: ArrayLike<number>): number;
  /** Potential energy over the thermal energy, without unit; the heights follow exp(−potential) in the long run. */
  potential(place: ArrayLike<number>): number;
}

export type Truth = SecondOrderTruth | FirstOrderTruth;

const felt = {
  bowl: 0.3, // 1/s²: steepness of the bowl-shaped tilt
  fan: 1.2, // 1/s²: strength of the fan at its centre
  fanX: -0.2, // m
  fanY: 0.05, // m
  fanWidth: 0.2, // m
  glide: 2, // 1/s: friction on the bare table
  felt: 2, // extra friction on the middle of the felt, in units of `glide`
  stripX: 0.05, // m
  stripWidth: 0.1, // m
  jets: 0.04, // m²/s³: mean strength of the air jets
  tilt: 0.5, // relative difference of the jets between the two ends
  jetWidth: 0.2, // m
};

/** Pucks on an air-cushion table; metres, seconds. */
export const FELT_TABLE: SecondOrderTruth = {
  order: 'second',
  dimensions: 2,
  parameters: felt,
  coefficients: {
    force: {
      form: 'vector',
      formulas: [
        '-bowl*x - fan*(y-fanY)*exp(-((x-fanX)^2+(y-fanY)^2)/(2*fanWidth^2))',
        '-bowl*y + fan*(x-fanX)*exp(-((x-fanX)^2+(y-fanY)^2)/(2*fanWidth^2))',
      ],
    },
    friction: { form: 'scalar', formulas: ['glide*(1+felt*exp(-(x-stripX)^2/(2*stripWidth^2)))'] },
    noise: { form: 'scalar', formulas: ['jets*(1+tilt*tanh(y/jetWidth))'] },
  },
  force(place) {
    const [dx, dy] = [place[0] - felt.fanX, place[1] - felt.fanY];
    const swirl = felt.fan * Math.exp(-(dx * dx + dy * dy) / (2 * felt.fanWidth ** 2));
    return [-felt.bowl * place[0] - swirl * dy, -felt.bowl * place[1] + swirl * dx];
  },
  friction(place) {
    const offset = (place[0] - felt.stripX) / felt.stripWidth;
    return felt.glide * (1 + felt.felt * Math.exp(-0.5 * offset * offset));
  },
  noise: (place) => felt.jets * (1 + felt.tilt * Math.tanh(place[1] / felt.jetWidth)),
};

const beads = {
  radius: 1.5e-6, // m
  free: 1.43e-13, // m²/s: diffusion far from the floor, of that radius in water at 20 °C
  scale: 1.5e-6, // m: height over which the weight costs one thermal energy
  repulsion: 10, // thermal energies at contact
  screening: 2e-7, // m: Debye length
};

/**
 * Beads sedimenting onto a floor; x is the gap between bead and floor; metres, seconds.
 *
 * Diffusion normal to a wall, D/D₀ = (6x² + 2ax)/(6x² + 9ax + 2a²): the approximation of Bevan & Prieve, J. Chem.
 * Phys. 113 (2000) 1228, to the series of Brenner, Chem. Eng. Sci. 16 (1961) 242 (Faxén's problem). The medium is at
 * one temperature, so the Itô drift is D′ − D U′, with U = x/scale + repulsion · exp(−x/screening).
 */
export const SETTLING_BEADS: FirstOrderTruth = {
  order: 'first',
  dimensions: 1,
  parameters: beads,
  coefficients: {
    drift: {
      form: 'vector',
      formulas: [
        'free*radius*(42*x^2+24*radius*x+4*radius^2)/(6*x^2+9*radius*x+2*radius^2)^2' +
          ' - free*(6*x^2+2*radius*x)/(6*x^2+9*radius*x+2*radius^2)*(1/scale-repulsion/screening*exp(-x/screening))',
      ],
    },
    diffusion: { form: 'scalar', formulas: ['free*(6*x^2+2*radius*x)/(6*x^2+9*radius*x+2*radius^2)'] },
  },
  drift(place) {
    const slope =
      1 / beads.scale - (beads.repulsion / beads.screening) * Math.exp(-place[0] / beads.screening);
    return [SETTLING_BEADS.diffusionSlope(place) - SETTLING_BEADS.diffusion(place) * slope];
  },
  diffusion(place) {
    const gap = place[0] / beads.radius;
    return (beads.free * (6 * gap * gap + 2 * gap)) / (6 * gap * gap + 9 * gap + 2);
  },
  diffusionSlope(place) {
    const gap = place[0] / beads.radius;
    const denominator = 6 * gap * gap + 9 * gap + 2;
    return ((beads.free / beads.radius) * (42 * gap * gap + 24 * gap + 4)) / (denominator * denominator);
  },
  potential: (place) => place[0] / beads.scale + beads.repulsion * Math.exp(-place[0] / beads.screening),
};

const stripes = {
  guide: 14, // µm/h²: largest pull towards the middle of a stripe
  adhesion: 1.5, // 1/h: mean friction
  contrast: 0.35, // relative excess of friction on the middle of a stripe
  drive: 400, // µm²/h³: the cells' own agitation, the same everywhere
  wave: (2 * Math.PI) / 40, // 1/µm: stripes repeat every 40 µm
  middle: 20, // µm
};

/** Cells crawling over adhesive stripes that run along x and repeat along y; micrometres, hours. */
export const STRIPE_CELLS: SecondOrderTruth = {
  order: 'second',
  dimensions: 2,
  parameters: stripes,
  coefficients: {
    force: { form: 'vector', formulas: ['0', '-guide*sin(wave*(y-middle))'] },
    friction: { form: 'scalar', formulas: ['adhesion*(1+contrast*cos(wave*(y-middle)))'] },
    noise: { form: 'scalar', formulas: ['drive'] },
  },
  force: (place) => [0, -stripes.guide * Math.sin(stripes.wave * (place[1] - stripes.middle))],
  friction: (place) =>
    stripes.adhesion * (1 + stripes.contrast * Math.cos(stripes.wave * (place[1] - stripes.middle))),
  noise: () => stripes.drive,
};

export const DATA_SET_NAMES = ['felt-table', 'settling-beads', 'stripe-cells'] as const;
export type DataSetName = (typeof DATA_SET_NAMES)[number];

export const TRUTHS = {
  'felt-table': FELT_TABLE,
  'settling-beads': SETTLING_BEADS,
  'stripe-cells': STRIPE_CELLS,
} as const satisfies Record<DataSetName, Truth>;
