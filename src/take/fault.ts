/** What can be wrong with a take or its place, with what to do about it: a value, never thrown. */
export interface TakeFault {
  readonly code: TakeFaultCode;
  /** The take, or the file or folder, it is about. */
  readonly take: string;
  /** What exactly is the matter. */
  readonly detail: string;
}

/** Each code with the remedy that goes with it. */
export const TAKE_REMEDIES = {
  TAKE_NAME: 'use letters, digits, - and _ (and dots inside), at most 64 of them, such as bow-2',
  TAKE_EXISTS: 'choose another name; a take is never written over',
  TAKE_MISSING: 'name one that "eidograph take list" shows',
  TAKE_UNREADABLE: 'allow this user to read it, or name another takes folder with --takes',
  TAKE_EMPTY: 'record it again; nothing can be recovered',
  TAKE_FOREIGN: 'name a take of eidograph: an Arrow stream that says so in its metadata',
  TAKE_NEWER: 'update eidograph to read it',
  TAKE_DISK_FULL: 'make room, or name another takes folder with --takes; what was written is kept',
  TAKE_DISK: 'look to the disk, or name another takes folder with --takes; what was written is kept',
  TAKE_DISK_SLOW: 'record to a faster disk with --takes; what was written is kept',
  TAKE_JOINTS: 'say which joint is which with --map old=new',
  TAKE_COMMANDED: 'play it with --as-commands; only its followers can be had again',
  TAKE_RANGE: 'choose times or marks inside the take, the earlier one first',
  TAKE_MARK: 'name one of its marks, or a time such as 2.5s',
  TAKE_COLUMN: 'name columns as "eidograph take export" writes them, with * for any part, such as wren.*',
  TAKE_FILE: 'name another file; nothing is written over',
  TAKE_ARM: 'write the arm: part of its profile, or play without --weight',
  TAKE_SHORT: 'choose a longer stretch',
  TAKE_UNFIT: 'choose takes that were recorded from the same joints',
} as const;

export type TakeFaultCode = keyof typeof TAKE_REMEDIES;

export function takeFault(code: TakeFaultCode, take: string, detail: string): TakeFault {
  return { code, take, detail };
}

/** `bow: there is no such take; name one that "eidograph take list" shows` */
export function takeSentence({ code, take, detail }: TakeFault): string {
  return `${take}: ${detail}; ${TAKE_REMEDIES[code]}`;
}

export function isTakeFault(value: object): value is TakeFault {
  return 'code' in value && typeof value.code === 'string' && value.code in TAKE_REMEDIES;
}

/** The fault behind what the file system refused. */
export function diskFault(take: string, error: unknown): TakeFault {
  const code = error instanceof Error && 'code' in error ? String(error.code) : 'UNKNOWN';
  if (code === 'ENOSPC' || code === 'EDQUOT' || code === 'EFBIG')
    return takeFault('TAKE_DISK_FULL', take, 'the disk is full');
  if (code === 'EEXIST') return takeFault('TAKE_EXISTS', take, 'there is a take of this name');
  if (code === 'ENOENT' || code === 'ENOTDIR') return takeFault('TAKE_MISSING', take, 'there is no such take');
  if (code === 'EACCES' || code === 'EPERM') return takeFault('TAKE_UNREADABLE', take, 'permission is denied');
  if (code === 'EISDIR') return takeFault('TAKE_FOREIGN', take, 'it is a folder');
  return takeFault('TAKE_DISK', take, `the system says ${code}`);
}
