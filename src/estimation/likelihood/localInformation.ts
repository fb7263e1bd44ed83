/**
 * What one step of a recording tells of the coefficients at its place, as if they were constant around it: Whittle's
 * information of the stationary series of displacements. Local parameters are, in this order, the force (drift) along
 * each axis, the components of friction and of noise (diffusion) before their link, and the logarithms of the
 * localization error variances.
 *
 * Force: h N⁻¹ (second order), h (2D)⁻¹ (first order). Between force and the rest there is none but through the mean
 * motion: where particles drift at u, the drift by friction −Γu tells of friction what a force does.
 *
 * Source  Whittle, Ark. Mat. 2 (1953) 423.
 */

import { informationPerPosition } from '../../momenta/precisionBound.js';
import type { LikelihoodLayout } from './layout.js';

/** A place with what is recorded there. */
export interface LocalSetting {
  /** Weighted sums of the components of friction and of noise, before their link. */
  readonly frictionSums: Float64Array;
  readonly noiseSums: Float64Array;
  readonly interval: number;
  /** Length d, length². */
  readonly errorVariances: Float64Array;
  /** Length d: mean velocity; null where it does not matter. */
  readonly flow: Float64Array | null;
}

/** Adds the information of `steps` steps about the local parameters, shape (L, L). */
export type LocalInformation = (setting: LocalSetting, steps: number, out: Float64Array) => void;

/** Number of local parameters, and where those of each kind start. */
export interface LocalNumbering {
  readonly force: number;
  readonly friction: number;
  readonly noise: number;
  readonly error: number;
  readonly count: number;
}

export function numberLocal(layout: LikelihoodLayout): LocalNumbering {
  const d = layout.dimensions;
  const friction = d;
  const noise = friction + (layout.friction?.components ?? 0);
  const error = noise + layout.noise.components;
  return { force: 0, friction, noise, error, count: error + d };
}

/** Tabulated over log ΓΔ and log s²/(TΔ²), read off bilinearly. */
const TABLE = { lowX: -7, highX: 3.5, lowR: -14, highR: 9, step: 0.5 };
const TABLE_ROWS = Math.round((TABLE.highX - TABLE.lowX) / TABLE.step) + 1;
const TABLE_COLUMNS = Math.round((TABLE.highR - TABLE.lowR) / TABLE.step) + 1;
const FREQUENCIES = 160;

/** Snapshots of axes that do not mix: each axis by itself. */
export function createAxisInformation(layout: LikelihoodLayout): LocalInformation {
  const d = layout.dimensions;
  const second = layout.model.order === 'second';
  const numbers = numberLocal(layout);
  const { count } = numbers;
  const table = second ? fillTable() : null;
  const noFriction = !layout.friction || layout.friction.basis < 0;
  const own = new Float64Array(9);
  return ({ frictionSums, noiseSums, interval, errorVariances, flow }, steps, out) => {
    for (let axis = 0; axis < d; axis++) {
      const friction = noFriction ? 0 : Math.exp(frictionSums[layout.friction?.components === d ? axis : 0]);
      const noise = Math.exp(noiseSums[layout.noise.components === d ? axis : 0]);
      if (table) {
        const x = Math.max(friction * interval, 1e-12);
        const thermal = (noise / (2 * Math.max(friction, 1e-300))) * interval * interval;
        readTable(table, Math.log(x), Math.log(Math.max(errorVariances[axis] / thermal, 1e-300)), own);
      } else {
        firstOrderInformation(errorVariances[axis] / (noise * interval), own);
      }
      const force = (steps * interval) / (second ? noise : 2 * noise);
      const f = axis;
      const n = numbers.noise + (layout.noise.components === d ? axis : 0);
      const e = numbers.error + axis;
      out[f * count + f] += force;
      out[n * count + n] += steps * own[4];
      out[n * count + e] += steps * own[5];
      out[e * count + e] += steps * own[8];
      if (!layout.friction || noFriction) continue;
      const g = numbers.friction + (layout.friction.components === d ? axis : 0);
      const carried = flow ? -friction * flow[axis] : 0;
      out[f * count + g] += force * carried;
      out[g * count + g] += steps * own[0] + force * carried * carried;
      out[g * count + n] += steps * own[1];
      out[g * count + e] += steps * own[2];
    }
  };
}

function readTable(table: Float64Array, logX: number, logRatio: number, out: Float64Array): void {
  const u = Math.min(Math.max((logX - TABLE.lowX) / TABLE.step, 0), TABLE_ROWS - 1.001);
  const v = Math.min(Math.max((logRatio - TABLE.lowR) / TABLE.step, 0), TABLE_COLUMNS - 1.001);
  const i = Math.floor(u);
  const j = Math.floor(v);
  const s = u - i;
  const t = v - j;
  const here = (i * TABLE_COLUMNS + j) * 9;
  const below = here + TABLE_COLUMNS * 9;
  for (let entry = 0; entry < 9; entry++) {
    out[entry] =
      (1 - s) * ((1 - t) * table[here + entry] + t * table[here + 9 + entry]) +
      s * ((1 - t) * table[below + entry] + t * table[below + 9 + entry]);
  }
}

function fillTable(): Float64Array {
  const filled = new Float64Array(TABLE_ROWS * TABLE_COLUMNS * 9);
  for (let i = 0; i < TABLE_ROWS; i++) {
    for (let j = 0; j < TABLE_COLUMNS; j++) {
      const ratio = Math.exp(TABLE.lowR + j * TABLE.step);
      const x = Math.exp(TABLE.lowX + i * TABLE.step);
      const values = informationPerPosition(x, Math.sqrt(ratio), FREQUENCIES);
      const scale = [1, 1, ratio]; // from s² to log s²
      for (let a = 0; a < 3; a++) {
        for (let b = 0; b < 3; b++)
          filled[(i * TABLE_COLUMNS + j) * 9 + a * 3 + b] = values[a * 3 + b] * scale[a] * scale[b];
      }
    }
  }
  return filled;
}

/**
 * First order: the displacement spectrum is 2Dh + 2s²(1 − cos ω). With r = s²/(Dh), the mean over ω of
 * (1 + r(1 − cos ω))⁻² is (1 + r)/(1 + 2r)^{3/2} and that of (1 + r(1 − cos ω))⁻¹ is (1 + 2r)^{−1/2}.
 */
function firstOrderInformation(r: number, out: Float64Array): void {
  const single = 1 / Math.sqrt(1 + 2 * r);
  const double = (1 + r) * single * single * single;
  out.fill(0);
  out[4] = double / 2;
  out[5] = (single - double) / 2;
  out[7] = out[5];
  out[8] = (1 - 2 * single + double) / 2;
}
