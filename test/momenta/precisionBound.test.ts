import { describe, expect, it } from 'vitest';
import { frictionPrecisionBound } from '../../src/momenta/precisionBound.js';

// Evaluated beforehand from Whittle's formula (Whittle 1953) by an independent program, 40 × 1000 frames, T = 1;
// rows: s/(v_th Δ); columns: ΓΔ.
const FRICTION_TIMES_INTERVAL = [0.05, 0.1, 0.2, 0.5, 1.0];
const ERROR_OVER_DISPLACEMENT = [0, 0.1, 0.3, 1.0];
const FRICTION = [
  [0.0324, 0.0235, 0.0175, 0.0129, 0.0119],
  [0.0336, 0.025, 0.0195, 0.0165, 0.0199],
  [0.0349, 0.0265, 0.0212, 0.0191, 0.0241],
  [0.0376, 0.0301, 0.0263, 0.0288, 0.0463],
];
const NOISE = [
  [0.0073, 0.0074, 0.0078, 0.0091, 0.0118],
  [0.0118, 0.0118, 0.0124, 0.0161, 0.0267],
  [0.0154, 0.0153, 0.0161, 0.021, 0.035],
  [0.022, 0.0229, 0.0261, 0.0398, 0.0786],
];

describe('the precision bound', () => {
  it('agrees with the tabulated bound to the printed digits', () => {
    const friction = ERROR_OVER_DISPLACEMENT.map((errorOverDisplacement) =>
      FRICTION_TIMES_INTERVAL.map((frictionTimesInterval) =>
        Number(
          frictionPrecisionBound({
            frictionTimesInterval,
            errorOverDisplacement,
            positions: 40_000,
          }).friction.toFixed(4),
        ),
      ),
    );
    const noise = ERROR_OVER_DISPLACEMENT.map((errorOverDisplacement) =>
      FRICTION_TIMES_INTERVAL.map((frictionTimesInterval) =>
        Number(
          frictionPrecisionBound({
            frictionTimesInterval,
            errorOverDisplacement,
            positions: 40_000,
          }).noise.toFixed(4),
        ),
      ),
    );
    expect({ friction, noise }).toEqual({ friction: FRICTION, noise: NOISE });
  });
});
