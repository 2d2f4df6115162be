import { closeSync, fstatSync, openSync, readFileSync } from 'node:fs';

/** What became of reading a file: its text, or why there is none. */
export type FileText =
  | { readonly text: string }
  | { readonly fault: 'missing' | 'unreadable' | 'too large'; readonly detail: string };

/** Reads a file whole. Injected, so that rigs load from memory too. */
export type ReadFile = (file: string) => FileText;

/** A rig of a hundred joints is some 30 KiB; anything past this is another kind of file. */
export const FILE_BYTES_MAX = 1024 * 1024;

/** From the disk. */
export const readFromDisk: ReadFile = (file) => {
  try {
    const descriptor = openSync(file, 'r');
    try {
      const stat = fstatSync(descriptor);
      if (!stat.isFile()) return { fault: 'unreadable', detail: 'it is not a file' };
      if (stat.size > FILE_BYTES_MAX) return { fault: 'too large', detail: `it has ${stat.size} bytes` };
      return { text: new TextDecoder('utf-8', { fatal: true }).decode(readFileSync(descriptor)) };
    } finally {
      closeSync(descriptor);
    }
  } catch (error) {
    return faultOf(error);
  }
};

/** What the system says of a file that it does not give. */
export function faultOf(error: unknown): FileText {
  const code = error instanceof Error && 'code' in error ? error.code : null;
  if (code === 'ENOENT' || code === 'ENOTDIR') return { fault: 'missing', detail: 'there is no such file' };
  if (code === 'EACCES' || code === 'EPERM') return { fault: 'unreadable', detail: 'permission is denied' };
  if (code === 'ERR_ENCODING_INVALID_ENCODED_DATA') return { fault: 'unreadable', detail: 'it is not UTF-8 text' };
  if (typeof code === 'string') return { fault: 'unreadable', detail: code };
  throw error;
}
