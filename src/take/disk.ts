import {
  close,
  closeSync,
  existsSync,
  fdatasync,
  fdatasyncSync,
  ftruncate,
  linkSync,
  mkdirSync,
  openSync,
  renameSync,
  rmSync,
  write,
  writeSync,
} from 'node:fs';
import { basename, dirname, join } from 'node:path';
import { diskFault, type TakeFault, takeFault } from './fault.ts';

type Done = (error: unknown) => void;

/** A file that is only ever appended to. `done` gets null, or why it failed; one call at a time. */
export interface TakeDisk {
  /** Appends all of `bytes`. */
  write(bytes: Uint8Array, done: Done): void;
  /** Brings what has been written to the disk itself. */
  sync(done: Done): void;
  /** Cuts the file back to this many bytes. */
  truncate(bytes: number, done: Done): void;
  close(done: Done): void;
}

/** Makes a new file, and its folder where there is none; never opens one that is there. */
export function newTakeFile(file: string): { readonly disk: TakeDisk } | { readonly fault: TakeFault } {
  const folder = dirname(file);
  try {
    mkdirSync(folder, { recursive: true });
  } catch (error) {
    // A file stands where a folder is asked for.
    const isFile = error instanceof Error && 'code' in error && (error.code === 'EEXIST' || error.code === 'ENOTDIR');
    return {
      fault: isFile ? takeFault('TAKE_DISK', nameOf(file), `${folder} is no folder`) : diskFault(nameOf(file), error),
    };
  }
  try {
    return { disk: threaded(openSync(file, 'wx')) };
  } catch (error) {
    return { fault: diskFault(nameOf(file), error) };
  }
}

/** Writes on libuv's threads: the loop that moves arms never waits for a disk. */
function threaded(descriptor: number): TakeDisk {
  const put = (bytes: Uint8Array, done: Done): void => {
    write(descriptor, bytes, 0, bytes.length, null, (error, written) => {
      if (error !== null) done(error);
      else if (written < bytes.length) put(bytes.subarray(written), done);
      else done(null);
    });
  };
  return {
    write: put,
    sync: (done) => fdatasync(descriptor, done),
    truncate: (bytes, done) => ftruncate(descriptor, bytes, done),
    close: (done) => close(descriptor, done),
  };
}

/** A file that comes to be whole or not at all: written beside its place, under a name that no list shows. */
export interface WholeFile {
  readonly file: string;
  write(bytes: Uint8Array): void;
  /** Puts it in its place, unless something is there by now. */
  keep(): TakeFault | null;
  /** Throws it away; harmless after `keep`. */
  drop(): void;
}

/**
 * A new file in a folder that is there. Throws what the system says: whoever writes a whole file catches it where the work
 * as a whole is guarded.
 */
export function wholeFile(file: string): WholeFile {
  const beside = join(dirname(file), `.${basename(file)}.${process.pid}.new`);
  const descriptor = openSync(beside, 'w');
  let open = true;
  const shut = (): void => {
    if (open) closeSync(descriptor);
    open = false;
  };
  return {
    file,
    write(bytes) {
      for (let at = 0; at < bytes.length; ) at += writeSync(descriptor, bytes, at);
    },
    keep() {
      fdatasyncSync(descriptor);
      shut();
      const isNew = placed(beside, file);
      rmSync(beside, { force: true });
      return isNew ? null : takeFault('TAKE_EXISTS', nameOf(file), 'there is a take of this name');
    },
    drop() {
      if (!open) return;
      shut();
      rmSync(beside, { force: true });
    },
  };
}

/** Gives a file its name, unless that is taken, however late: false. */
function placed(beside: string, file: string): boolean {
  try {
    linkSync(beside, file);
    return true;
  } catch (error) {
    if (existsSync(file)) return false;
    // Some disks have no links (FAT); there a name can only be looked for first.
    if (error instanceof Error && 'code' in error && error.code === 'ENOENT') throw error;
    renameSync(beside, file);
    return true;
  }
}

/** A file of an export or a drawing; what is wrong is said of the file, not of a take. */
export function outputFile(file: string, name: string): WholeFile | TakeFault {
  if (existsSync(file)) return takeFault('TAKE_FILE', name, 'it is there already');
  try {
    return wholeFile(file);
  } catch (error) {
    const isMissing =
      error instanceof Error && 'code' in error && (error.code === 'ENOENT' || error.code === 'ENOTDIR');
    return isMissing ? takeFault('TAKE_FILE', name, `there is no folder ${dirname(file)}`) : diskFault(name, error);
  }
}

/** A whole file as a disk: what is written has been written when the call returns. */
export function offlineDisk(whole: WholeFile): TakeDisk {
  return {
    write(bytes, done) {
      whole.write(bytes);
      done(null);
    },
    sync: (done) => done(null),
    truncate: (_, done) => done(null),
    close: (done) => done(null),
  };
}

function nameOf(file: string): string {
  return basename(file, '.arrows');
}
