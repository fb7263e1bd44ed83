/** `simulate SCENARIO`: a track table that `survey` and `fit` read. */

import { UsageError } from '../../errors.js';
import { formatTrackTable } from '../../import/formatTracks.js';
import type { StepControl } from '../../simulation/controlStep.js';
import { parseScenario } from '../../simulation/parseScenario.js';
import { simulateScenario } from '../../simulation/simulateScenario.js';
import { countPositions, countTracks } from '../../tracks/TrackSet.js';
import type { Call } from '../commandTable.js';
import { readDocument, writeWhole } from '../files.js';
import { checkResultPlace, formatJson } from '../results.js';
import { withWorkers } from '../workers.js';

/** @throws UsageError, NumericalError */
export async function runSimulate({ operands, options, terminal }: Call): Promise<void> {
  const [path] = operands;
  const output = options.output as string | undefined;
  if (options.json && output === undefined) {
    throw new UsageError(
      '--json needs -o FILE for simulate, since the track table itself goes to standard output',
      {
        option: '--json',
      },
    );
  }
  checkResultPlace(output, [path], terminal);
  const value = await readDocument(terminal.resolve(path), 'scenario', path);
  const scenario = parseScenario(value, path);
  const seed = (options.seed as number | undefined) ?? 1;
  const progress = await terminal.startProgress('simulating');
  const { tracks, warnings, step, stepControl } = await withWorkers(options.workers, (mapTasks) =>
    simulateScenario(scenario, {
      tracks: options.tracks as number | undefined,
      frames: options.frames as number | undefined,
      interval: options.interval as number | undefined,
      ensemble: options.ensemble === true,
      tolerance: options.tolerance as number | undefined,
      seed,
      mapTasks,
      onProgress: progress.update,
    }),
  ).finally(progress.stop);
  for (const warning of warnings) terminal.warn(warning);
  if (stepControl !== null) terminal.note(describeStepControl(stepControl));

  if (output === undefined) {
    for (const piece of formatTrackTable(tracks)) {
      if (terminal.isClosed) return;
      await terminal.print(piece);
    }
    return;
  }
  await writeWhole(terminal.resolve(output), formatTrackTable(tracks), output);
  terminal.note(`wrote ${output}: ${countTracks(tracks)} tracks, ${countPositions(tracks)} positions`);
  if (options.json) {
    await terminal.print(
      formatJson({
        output,
        tracks: countTracks(tracks),
        positions: countPositions(tracks),
        seed,
        step,
        stepControl: stepControl ?? undefined,
      }),
    );
  }
}

function describeStepControl(control: StepControl): string {
  const { step, halvings, error, errorDeviation, average, order, orderDeviation } = control;
  const percent = (share: number): string => `${Number((100 * share).toPrecision(2))} %`;
  const told =
    order === null
      ? 'the order of convergence is hidden by the scatter'
      : `observed order of convergence ${order.toFixed(2)} ± ${(orderDeviation ?? 0).toFixed(2)}`;
  return `time step ${Number(step.toPrecision(3))} after ${halvings} halvings: the mean ${average} errs most, by ${percent(error)} ± ${percent(errorDeviation)}; ${told}`;
}
