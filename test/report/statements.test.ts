/** Sentences about tests, and notes of any origin made into sentences. */

import { describe, expect, it } from 'vitest';
import type { ReportedTest } from '../../src/report/ReportInput.js';
import { saySentence } from '../../src/report/sections/Section.js';
import { sayStatement, sayTests } from '../../src/report/statements.js';

const TEST: ReportedTest = {
  hypothesis: 'uniform-noise',
  statistic: 1,
  p: 0.01,
  rejected: true,
  parameters: { noise_xx: { value: 1, low: 0, high: 2 } },
  note: '',
};

describe('statements', () => {
  it('speak of the diffusion at first order', () => {
    expect(sayStatement(TEST)).toBe('The noise is equally strong everywhere');
    const ofDiffusion = { ...TEST, parameters: { diffusion_xx: { value: 1, low: 0, high: 2 } } };
    expect(sayStatement(ofDiffusion)).toBe('The diffusion is the same everywhere');
  });

  it('are counted in words', () => {
    const kept = { ...TEST, rejected: false };
    expect(sayTests([TEST, TEST])).toBe('Both statements are rejected.');
    expect(sayTests([TEST, TEST, TEST])).toBe('All 3 statements are rejected.');
    expect(sayTests([TEST, kept])).toBe('Of 2 statements 1 is rejected.');
  });
});

describe('a note as a sentence', () => {
  it.each([
    ['nothing speaks against it', 'Nothing speaks against it.'],
    ['it falls to 1.3 at x = -0.41, y = 0.57', 'It falls to 1.3 at x = −0.41, y = 0.57.'],
    ['Done already.', 'Done already.'],
    ['first-order, 3-4', 'First-order, 3-4.'],
    ['', ''],
  ])('%s', (text, sentence) => {
    expect(saySentence(text)).toBe(sentence);
  });
});
