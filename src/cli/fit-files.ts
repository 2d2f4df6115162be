import { writeFileSync } from 'node:fs';
import { type Calendar, calendarNow } from '../clock/calendar.ts';
import type { Change } from '../fit/changes.ts';
import { type FileText, type ReadFile, readFromDisk } from '../rig/file-reader.ts';
import { type Replaced, type ReplaceFault, replaceFile } from '../rig/replace-file.ts';
import { readCapturesFile } from './fit-keeper.ts';

/** What `fit` reads and writes; a test has its own. */
export interface FitFiles {
  readonly readRig: ReadFile;
  /** Captures: larger than any rig. */
  read(file: string): FileText;
  now(): Calendar;
  /** Puts a change in its file's place, whole or not at all, and keeps the old one beside it with a time stamp. */
  replace(change: Change): Replaced | ReplaceFault;
  /** Puts back what stood there before a change. */
  takeBack(change: Change): void;
  /** A sentence when it cannot; null when done. */
  writeNew(file: string, text: string): string | null;
}

export function filesOnDisk(now: () => Calendar = calendarNow): FitFiles {
  return {
    readRig: readFromDisk,
    read: readCapturesFile,
    now,
    replace({ file, was, text }) {
      const { date, time } = now();
      return replaceFile(file, was, text, `${date}T${time}`);
    },
    takeBack: ({ file, was, text }) => void replaceFile(file, text, was, false),
    writeNew(file, text) {
      try {
        writeFileSync(file, text);
        return null;
      } catch (fault) {
        return `${file} cannot be written: ${fault instanceof Error ? fault.message : String(fault)}`;
      }
    },
  };
}
