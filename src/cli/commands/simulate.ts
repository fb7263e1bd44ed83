/** `simulate SCENARIO`: a track table that `survey` and `fit` read. */

import { UsageError } from '../../errors.js';
import { formatTrackTable } from '../../import/formatTracks.js';
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
  const { tracks, warnings } = await withWorkers(options.workers, (mapTasks) =>
    simulateScenario(scenario, {
      tracks: options.tracks as number | undefined,
      frames: options.frames as number | undefined,
      interval: options.interval as number | undefined,
      ensemble: options.ensemble === true,
      seed,
      mapTasks,
      onProgress: progress.update,
    }),
  ).finally(progress.stop);
  for (const warning of warnings) terminal.warn(warning);

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
      formatJson({ output, tracks: countTracks(tracks), positions: countPositions(tracks), seed }),
    );
  }
}
