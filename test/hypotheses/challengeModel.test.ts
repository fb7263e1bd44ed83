import { describe, expect, it } from 'vitest';
import { type ChallengeResult, type Check, CHECKS } from '../../src/hypotheses/challenge/ChallengeResult.js';
import { challengeModel, correctByHolm } from '../../src/hypotheses/challenge/challengeModel.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { bareFit } from '../support/bareFit.js';
import {
  type Departure,
  mislinkTrack,
  shakeStage,
  simulateDrift,
  simulateKicks,
  simulateMemory,
  simulateSpeedDependence,
} from '../support/departures.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

const DESIGN: Departure = {
  tracks: 10,
  frames: 600,
  interval: 0.2,
  substeps: 10,
  localizationError: 0.02,
  seed: 1,
};

function challenge(tracks: TrackSet, order: 'first' | 'second' = 'second'): ChallengeResult {
  const fit = bareFit(tracks, { order, relaxationTime: order === 'second' ? 1 : null });
  return challengeModel(fit, tracks, 0.95);
}

function find(result: ChallengeResult, name: string): Check {
  const check = result.checks.find((candidate) => candidate.name === name);
  if (check === undefined) throw new Error(`no check ${name}`);
  return check;
}

const trapped = simulateSecondOrder({
  tracks: 10,
  frames: 600,
  interval: 0.2,
  friction: 1,
  stiffness: 0.2,
  localizationError: 0.02,
  seed: 1,
});

describe('a model that is right', () => {
  const result = challenge(trapped);

  it('stands every challenge', () => {
    expect(result.checks.map(({ name }) => name)).toEqual([...CHECKS]);
    expect(result.holds).toBe(true);
    expect(result.checks.every(({ holds }) => holds)).toBe(true);
  });

  it('has p-values that are corrected for the number of checks', () => {
    const corrected = correctByHolm(result.checks.map(({ pAlone }) => pAlone));
    expect(result.checks.map(({ p }) => p)).toEqual(corrected);
    for (const { p, pAlone } of result.checks) expect(p).toBeGreaterThanOrEqual(pAlone);
  });

  it('stands them at first order, where speed is left out', () => {
    const tracks = simulateFirstOrder({
      tracks: 10,
      frames: 500,
      diffusion: 0.5,
      relaxation: 0.1,
      localizationError: 0.3,
      seed: 2,
    });
    const first = challenge(tracks, 'first');
    expect(first.holds).toBe(true);
    expect(first.skipped.map(({ name }) => name)).toEqual(['speed-dependent-friction']);
  });
});

describe('a model that is wrong', () => {
  it('for friction that grows with speed is told so, with the direction', () => {
    const result = challenge(simulateSpeedDependence({ ...DESIGN, tracks: 20 }, 0.3, 0.8));
    const check = find(result, 'speed-dependent-friction');
    expect(check.holds).toBe(false);
    expect(check.note).toContain('braked more');
    expect(check.effect.value).toBeLessThan(-3 * (check.effect.error ?? Infinity));
  });

  it('for a memory of 1.2 relaxation times is told so', () => {
    const check = find(challenge(simulateMemory(DESIGN, 1.2)), 'memory');
    expect(check.holds).toBe(false);
    expect(check.p).toBeLessThan(0.001);
  });

  it('for noise in kicks is told so', () => {
    const check = find(challenge(simulateKicks(DESIGN, 4)), 'gaussian-noise');
    expect(check.holds).toBe(false);
    expect(check.effect.value).toBeGreaterThan(0.2);
  });

  it('for noise that grows by half over the recording is told so', () => {
    const check = find(challenge(simulateDrift(DESIGN, 0.5)), 'stationarity');
    expect(check.holds).toBe(false);
    // the scatter of steps follows the noise where localization error is small
    expect(Math.abs(check.effect.value - 0.5)).toBeLessThan(4 * (check.effect.error ?? 0));
  });

  it('for a stage that shakes is told so', () => {
    const check = find(challenge(shakeStage(trapped, 0.03, 1)), 'independent-tracks');
    expect(check.holds).toBe(false);
    expect(check.effect.value).toBeGreaterThan(0);
  });

  it('for a wrong link is told which', () => {
    const check = find(challenge(mislinkTrack(trapped, 4, 4)), 'mislinked-jumps');
    expect(check.holds).toBe(false);
    expect(check.note).toContain('track 5 at time 59.8');
  });
});

describe('Holm’s correction', () => {
  it('gives adjusted values as published', () => {
    // Wright, Adjusted p-values for simultaneous inference, Biometrics 48 (1992) 1005: the procedure by hand
    expect(correctByHolm([0.01, 0.04, 0.03, 0.005])).toEqual([0.03, 0.06, 0.06, 0.02]);
  });

  it('never passes one, nor lets a larger value become the smaller', () => {
    expect(correctByHolm([0.5, 0.4])).toEqual([0.8, 0.8]);
    expect(correctByHolm([])).toEqual([]);
  });
});
