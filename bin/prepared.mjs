// Installs the locked packages when they are missing or older than the lock file; otherwise does nothing.
import { execSync } from 'node:child_process';
import { existsSync, statSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('..', import.meta.url));
const marker = `${root}/node_modules/.package-lock.json`;
const lock = `${root}/package-lock.json`;
if (!existsSync(marker) || statSync(marker).mtimeMs < statSync(lock).mtimeMs) {
  execSync('npm ci --no-audit --no-fund', { cwd: root, stdio: ['ignore', 2, 2] });
}
