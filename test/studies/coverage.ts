/**
 * How often intervals and bands of every estimator and order hold the truth.
 * Run with `npm run study:coverage [studies] [likelihood|differences|kernel]`.
 */

import { studySchema } from '../../src/documents/Study.js';
import { fitTracks } from '../../src/fit.js';
import { judgeFit } from '../support/judgeFit.js';
import { bumpCase, diffusionCase, simulateCase } from '../support/variedCases.js';
import { mean, percent, printTable } from './table.js';

const studies = Number(process.argv[2] ?? 200);
const estimators = process.argv[3] ? [process.argv[3]] : ['likelihood', 'differences', 'kernel'];

const rows: string[][] = [];
for (const estimator of estimators) {
  for (const given of [bumpCase(0.1), diffusionCase(0.2)]) {
    const coverage: Record<string, number[]> = {};
    const held: Record<string, number[]> = {};
    for (let seed = 1; seed <= studies; seed++) {
      const study = studySchema.parse({ ...given.study, order: given.order, estimator, seed });
      for (const verdict of judgeFit(await fitTracks(simulateCase(given, seed), study), given)) {
        (coverage[verdict.name] ??= []).push(verdict.coverage);
        (held[verdict.name] ??= []).push(Number(verdict.held));
      }
    }
    for (const name of Object.keys(coverage))
      rows.push([estimator, given.title, name, percent(mean(coverage[name])), percent(mean(held[name]))]);
  }
}
printTable(
  `Coverage at 95 %, ${studies} studies`,
  ['estimator', 'case', 'column', 'pointwise, mean over the visited region', 'simultaneous band holds'],
  rows,
);
