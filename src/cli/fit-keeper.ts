import { closeSync, existsSync, fdatasyncSync, openSync, readFileSync, statSync, writeSync } from 'node:fs';
import type { Capture } from '../fit/captures.ts';
import { faultOf, type FileText } from '../rig/file-reader.ts';
import { captureLine, CAPTURES_HEADER } from './fit-captures-csv.ts';

/** Ten joints swept for ten minutes at a hundred readings a second are 30 MB. */
const CAPTURES_BYTES_MAX = 64 * 1024 * 1024;

export function readCapturesFile(file: string): FileText {
  try {
    const stat = statSync(file);
    if (!stat.isFile()) return { fault: 'unreadable', detail: 'it is not a file' };
    if (stat.size > CAPTURES_BYTES_MAX) return { fault: 'too large', detail: 'it is larger than any captures' };
    return { text: readFileSync(file, 'utf8') };
  } catch (fault) {
    return faultOf(fault);
  }
}

/** Whether a session can add to a file: its columns are the session's own. */
export function takesCaptures(text: string): boolean {
  return text === '' || text.replace('\r\n', '\n').startsWith(CAPTURES_HEADER);
}

/** Captures kept as they are made: what has been measured outlives a crash. */
export interface Keeper {
  /** Appends and brings to the disk; throws what the system says when it cannot. */
  keep(captures: readonly Capture[]): void;
  close(): void;
}

export function keeper(file: string): Keeper {
  const isNew = !existsSync(file);
  const descriptor = openSync(file, 'a');
  const put = (text: string): void => {
    const bytes = Buffer.from(text);
    for (let at = 0; at < bytes.length; ) at += writeSync(descriptor, bytes, at);
    fdatasyncSync(descriptor);
  };
  // A crash in the midst of a line leaves half of one: what follows begins on a line of its own.
  const end = isNew ? '' : readFileSync(file, 'utf8').slice(-1);
  if (isNew || end === '') put(CAPTURES_HEADER);
  else if (end !== '\n') put('\n');
  return {
    keep: (captures) => put(captures.map(captureLine).join('')),
    close: () => closeSync(descriptor),
  };
}
