import { spawnSync } from 'node:child_process';
import { accessSync, constants } from 'node:fs';
import { delimiter, join } from 'node:path';

export interface SystemPackage {
  /** Name in Debian. */
  readonly name: string;
  /** The program it brings, looked for on the PATH. */
  readonly program: string;
  readonly neededBy: string;
}

const INSTALL_LIMIT_MS = 300_000;

/** Installs what is missing where that is allowed (root on a Debian system), and returns what is missing after all. */
export function provide(packages: readonly SystemPackage[]): readonly SystemPackage[] {
  const missing = packages.filter(isMissing);
  if (missing.length === 0 || process.getuid?.() !== 0 || !isOnPath('apt-get')) return missing;
  // The lists of a fresh machine are empty or old: an install without an update finds nothing.
  aptGet('update');
  aptGet('install', '--yes', '--no-install-recommends', ...missing.map((entry) => entry.name));
  return packages.filter(isMissing);
}

function isMissing(entry: SystemPackage): boolean {
  return !isOnPath(entry.program);
}

function isOnPath(program: string): boolean {
  return (process.env.PATH ?? '').split(delimiter).some((folder) => isExecutable(join(folder, program)));
}

function isExecutable(path: string): boolean {
  try {
    accessSync(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

function aptGet(...args: string[]): void {
  const run = spawnSync('apt-get', ['--quiet', ...args], {
    stdio: ['ignore', 'pipe', 'pipe'],
    encoding: 'utf8',
    timeout: INSTALL_LIMIT_MS,
    env: { ...process.env, DEBIAN_FRONTEND: 'noninteractive' },
  });
  if (run.status !== 0) console.log(`apt-get ${args[0]} failed:\n${run.stdout}${run.stderr}`);
}
