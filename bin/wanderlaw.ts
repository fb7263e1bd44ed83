#!/usr/bin/env node
import { writeSync } from 'node:fs';
import { explainSystemError } from '../src/cli/files.js';
import { run } from '../src/cli/main.js';
import { removeUnfinishedFiles } from '../src/cli/unfinishedFiles.js';

for (const stream of [process.stdout, process.stderr]) {
  stream.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code === 'EPIPE') return; // the reader has seen enough (`wanderlaw … | head`)
    removeUnfinishedFiles();
    if (stream === process.stdout) {
      writeSync(
        2,
        `wanderlaw: standard output cannot be written: ${explainSystemError(error)}; send it elsewhere\n`,
      );
    }
    process.exit(2);
  });
}

process.exitCode = await run(process.argv.slice(2));
