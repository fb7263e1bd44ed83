/** The program's own name and version, from its package. */

import { existsSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

/** The directory of the package: where package.json, datasets and dist are, built or not. */
export const PACKAGE_ROOT = findPackageRoot(dirname(fileURLToPath(import.meta.url)));

function findPackageRoot(start: string): string {
  let directory = start;
  while (!existsSync(join(directory, 'package.json'))) {
    const parent = dirname(directory);
    if (parent === directory) throw new Error(`no package.json above ${start}`);
    directory = parent;
  }
  return directory;
}

/** For example `0.1.0`. */
export function readVersion(): string {
  const { version } = JSON.parse(readFileSync(join(PACKAGE_ROOT, 'package.json'), 'utf8')) as {
    version: string;
  };
  return version;
}
