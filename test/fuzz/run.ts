/** `npm run fuzz [-- CASES [SEED]]`: damaged files through every reader; exit status 1 and the cases where one fails. */

import { fuzzTarget } from './fuzzTarget.js';
import { createTargets } from './targets.js';

const CASES = 120_000;
const SLOW = 10_000; // milliseconds; no reader has reason to take as long over a few kilobytes, even on a busy machine

const cases = Number(process.argv[2] ?? CASES);
const seed = Number(process.argv[3] ?? 1);
let failed = false;
const targets = await createTargets();
for (const target of targets) {
  const { accepted, refused, faults, longest } = await fuzzTarget(
    target,
    Math.ceil(cases / targets.length),
    seed,
  );
  console.log(
    `${target.name}: ${accepted} accepted, ${refused} refused, ${faults.length} faults, longest ${longest.toFixed(0)} ms`,
  );
  for (const fault of faults.slice(0, 5)) console.log(JSON.stringify(fault, null, 1));
  failed ||= faults.length > 0 || longest > SLOW;
}
process.exitCode = failed ? 1 : 0;
