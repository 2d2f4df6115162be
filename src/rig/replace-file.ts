import {
  chmodSync,
  closeSync,
  copyFileSync,
  fsyncSync,
  openSync,
  readFileSync,
  realpathSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { dirname, join, basename } from 'node:path';

/** Why a file was left as it is, and what would help. */
export interface ReplaceFault {
  readonly wrong: string;
  readonly right: string;
}

export interface Replaced {
  /** Where the old text was kept; null if that was not asked. */
  readonly kept: string | null;
}

/**
 * Puts a new text in a file's place, whole or not at all: written beside it, brought to the disk, then renamed over it.
 * @param was the text that `text` was made from: if another hand has saved the file meanwhile, it is left alone
 * @param keep the old text stays in a file of the same name with `.old` after it, or with these words instead of `old`
 */
export function replaceFile(file: string, was: string, text: string, keep: boolean | string): Replaced | ReplaceFault {
  let beside: string | null = null;
  try {
    // A link stays one: what it leads to is replaced.
    const target = realpathSync(file);
    if (readFileSync(target, 'utf8') !== was) {
      return { wrong: `${file} has been changed meanwhile`, right: 'look at it, and try again' };
    }
    const kept = keep === false ? null : `${target}.${keep === true ? 'old' : keep}`;
    if (kept !== null) copyFileSync(target, kept);
    beside = join(dirname(target), `.${basename(target)}.${process.pid}.new`);
    writeWhole(beside, text, statSync(target).mode);
    renameSync(beside, target);
    syncFolder(dirname(target));
    return { kept };
  } catch (error) {
    if (beside !== null) rmSync(beside, { force: true });
    const detail = error instanceof Error ? error.message : String(error);
    return {
      wrong: `${file} cannot be written: ${detail}`,
      right: 'allow it to be written, and look for room on the disk',
    };
  }
}

function writeWhole(file: string, text: string, mode: number): void {
  const descriptor = openSync(file, 'w', mode);
  try {
    writeFileSync(descriptor, text);
    fsyncSync(descriptor);
  } finally {
    closeSync(descriptor);
  }
  // The mode given to open is cut by the umask.
  chmodSync(file, mode);
}

/** The rename itself has to outlive a power cut too. Windows opens no folders, and needs no such thing. */
function syncFolder(folder: string): void {
  if (process.platform === 'win32') return;
  const descriptor = openSync(folder, 'r');
  try {
    fsyncSync(descriptor);
  } finally {
    closeSync(descriptor);
  }
}
