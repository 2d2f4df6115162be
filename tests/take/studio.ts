import { mkdtempSync, readFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll } from 'vitest';
import { rmSync } from 'node:fs';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { isTakeFault, takeSentence } from '../../src/take/fault.ts';
import { newTakeFile, type TakeDisk } from '../../src/take/disk.ts';
import { type Made, takeHeader, type TakeHeader } from '../../src/take/header.ts';
import { openTake, type Take } from '../../src/take/reader.ts';
import { type Recorder, recorder } from '../../src/take/recorder.ts';
import { copyRow, row as makeRow, type Row } from '../../src/take/row.ts';
import { takeWriter, type TakeWriter } from '../../src/take/writer.ts';
import { Performance, rigOf, rigYaml } from '../bridge/performance.ts';

const RECORDED: Made = { by: 'record', parents: [], how: {}, posed: false };

/** A folder of its own for a test file, gone afterwards. */
export function takesFolderForTests(): string {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-take-'));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

export const TWO_ARMS = rigOf(
  rigYaml([
    ['wren', 'sim:arm?name=wren'],
    ['stork', 'sim:arm?name=stork'],
  ]),
);

export function headerOf(rig: CompiledRig, startUs = 0, made: Made = RECORDED): TakeHeader {
  const inputs = rig.boards.find(({ leads }) => leads)?.plan.inputs?.names ?? [];
  return takeHeader(rig, inputs, startUs, true, made);
}

/** A writer to a new file of the folder. */
export function fileWriter(folder: string, name: string, header: TakeHeader): TakeWriter {
  const made = newTakeFile(join(folder, `${name}.arrows`));
  if ('fault' in made) throw new Error(takeSentence(made.fault));
  return takeWriter(name, header, null, made.disk);
}

export interface Filmed {
  readonly performance: Performance;
  readonly recorder: Recorder;
  readonly file: string;
  take(): Take;
}

/** A simulated performance that is recorded from its first event on. */
export function filmed(folder: string, name: string, rig: CompiledRig = TWO_ARMS): Filmed {
  let begun: Recorder | null = null;
  const writer = fileWriter(folder, name, headerOf(rig, 1_000_000));
  const performance: Performance = new Performance(rig, {
    onStart: (drive, events$, clock) => {
      begun = recorder(drive, events$, clock, writer, 1_000_000);
    },
  });
  const file = join(folder, `${name}.arrows`);
  if (begun === null) throw new Error('nothing was begun');
  return { performance, recorder: begun, file, take: () => opened(file) };
}

export function opened(file: string): Take {
  const take = openTake(file);
  if (isTakeFault(take)) throw new Error(takeSentence(take));
  return take;
}

/** Every row, copied. */
export function rowsOf(take: Take, fromUs = 0): Row[] {
  return Array.from(take.readFrom(fromUs), (row) => {
    const copy = makeRow(take.header);
    copyRow(row, copy);
    return copy;
  });
}

/** A disk in memory that can fail from a byte on. */
export function memoryDisk(capacity = Number.POSITIVE_INFINITY): TakeDisk & { bytes(): Uint8Array; synced: number } {
  let content = Buffer.alloc(0);
  const disk = {
    synced: 0,
    bytes: () => content,
    write(bytes: Uint8Array, done: (error: unknown) => void): void {
      const room = capacity - content.length;
      content = Buffer.concat([content, bytes.subarray(0, Math.max(0, room))]);
      done(bytes.length <= room ? null : Object.assign(new Error('no room'), { code: 'ENOSPC' }));
    },
    sync(done: (error: unknown) => void): void {
      disk.synced = content.length;
      done(null);
    },
    truncate(bytes: number, done: (error: unknown) => void): void {
      content = content.subarray(0, bytes);
      done(null);
    },
    close: (done: (error: unknown) => void): void => done(null),
  };
  return disk;
}

export function bytesOf(file: string): Uint8Array {
  return readFileSync(file);
}
