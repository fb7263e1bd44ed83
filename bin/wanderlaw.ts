#!/usr/bin/env node
import { removeUnfinishedFiles } from '../src/cli/files.js';
import { run } from '../src/cli/main.js';

for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) {
  process.once(signal, () => {
    removeUnfinishedFiles();
    process.kill(process.pid, signal); // the listener is gone: ends the way the signal says
  });
}
for (const stream of [process.stdout, process.stderr]) {
  stream.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code !== 'EPIPE') throw error; // EPIPE: the reader has seen enough (`wanderlaw … | head`)
  });
}

process.exitCode = await run(process.argv.slice(2));
