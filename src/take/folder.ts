import { readdirSync, statfsSync, statSync } from 'node:fs';
import { homedir } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import { takeFault, type TakeFault } from './fault.ts';

const TAKE_SUFFIX = '.arrows';

/** Where takes live: `chosen`, or the user's data folder (XDG Base Directory Specification 0.8). */
export function takesFolder(chosen: string | undefined, env: NodeJS.ProcessEnv): string {
  if (chosen !== undefined) return resolve(chosen);
  const base = env['XDG_DATA_HOME'];
  // The specification has relative paths there ignored.
  const data = base?.startsWith('/') === true ? base : join(homedir(), '.local', 'share');
  return join(data, 'eidograph', 'takes');
}

/** Letters of any script; no separator, no leading dot, nothing that a shell or another system reads as more than a name. */
const NAME = /^[\p{L}\p{N}](?:[\p{L}\p{M}\p{N}_-]|\.(?!\.)){0,63}$/u;
/** Devices on Windows, with or without an extension. */
const DEVICE = /^(?:con|prn|aux|nul|com\d|lpt\d)(?:\.|$)/i;

/** The file of a take, inside the folder whatever the name is; or what is wrong with the name. */
export function takeFile(folder: string, name: string): { readonly file: string } | { readonly fault: TakeFault } {
  const bare = name.endsWith(TAKE_SUFFIX) ? name.slice(0, -TAKE_SUFFIX.length) : name;
  if (!NAME.test(bare) || bare.endsWith('.') || DEVICE.test(bare))
    return { fault: takeFault('TAKE_NAME', name, 'this is no name for a take') };
  return { file: join(folder, bare + TAKE_SUFFIX) };
}

/** Names of the takes in a folder, sorted; none where there is no folder. */
export function takeNames(folder: string): readonly string[] {
  try {
    return readdirSync(folder, { withFileTypes: true })
      .filter((entry) => entry.isFile() && entry.name.endsWith(TAKE_SUFFIX) && !entry.name.startsWith('.'))
      .map((entry) => entry.name.slice(0, -TAKE_SUFFIX.length))
      .toSorted();
  } catch {
    return [];
  }
}

/** When a take was last written, as ISO 8601 has it, or null. */
export function writtenAt(file: string): string | null {
  try {
    return statSync(file).mtime.toISOString();
  } catch {
    return null;
  }
}

/** Bytes that this user can still write to the disk of a folder, made or not; null where the system does not tell. */
export function freeBytes(folder: string): number | null {
  try {
    const { bavail, bsize } = statfsSync(folder);
    return bavail * bsize;
  } catch (error) {
    const isMissing = error instanceof Error && 'code' in error && error.code === 'ENOENT';
    return isMissing && dirname(folder) !== folder ? freeBytes(dirname(folder)) : null;
  }
}
