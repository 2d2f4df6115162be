/** A file whose frames lie about themselves: every length, offset and count of a message, at its extremes. */
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { isTakeFault } from '../../src/take/fault.ts';
import { type Frame, frameAt, frameEnd } from '../../src/take/framing.ts';
import { openTake } from '../../src/take/reader.ts';
import { bytesOf, fileWriter, headerOf, rowsOf, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
const BATCHES = 4;
const ROWS = 30;
/** Of a message: its mark and its length (Arrow columnar format, "Encapsulated message format"). */
const PREFIX_BYTES = 8;
let bytes: Uint8Array;
let frames: readonly Frame[];

beforeAll(async () => {
  const writer = fileWriter(folder, 'whole', headerOf(TWO_ARMS));
  for (let i = 0; i < BATCHES * ROWS; i++) {
    Object.assign(writer.row, { tUs: i * 4_000, event: 0, name: i % 50 === 49 ? 'bow' : '' });
    writer.append();
    if (i % ROWS === ROWS - 1) writer.flush();
  }
  await writer.end();
  bytes = bytesOf(join(folder, 'whole.arrows'));
  const found: Frame[] = [];
  const read = (offset: number, count: number): Uint8Array => bytes.subarray(offset, offset + count);
  for (let offset = 0; ; ) {
    const frame = frameAt(offset, bytes.length, read, []);
    if (typeof frame === 'string') break;
    found.push(frame);
    offset = frameEnd(frame);
  }
  frames = found;
});

/** Opens damaged bytes and reads all there is; how many rows came, or the code of the fault. */
function judged(name: string, damaged: Uint8Array): number | string {
  const file = join(folder, `${name}.arrows`);
  writeFileSync(file, damaged);
  const take = openTake(file);
  if (isTakeFault(take)) return take.code;
  const rows = rowsOf(take);
  expect(rows.length + take.damagedRows).toBe(take.rows);
  for (const { tUs } of rows) expect(Number.isSafeInteger(tUs) && tUs >= 0).toBe(true);
  take.close();
  return rows.length;
}

function with32(at: number, value: number): Uint8Array {
  const damaged = Uint8Array.from(bytes);
  new DataView(damaged.buffer).setInt32(at, value, true);
  return damaged;
}

const EXTREMES = [0, 1, 7, 8, -1, -8, 255, 65_536, 0x7fff_ffff, -0x8000_0000, 0x0100_0000] as const;

describe('a take with a corrupt length', () => {
  it('has one schema and its batches', () => {
    expect(frames.map(({ kind }) => kind)).toEqual(['schema', ...Array.from({ length: BATCHES }, () => 'batch')]);
  });

  it('of a message opens up to that message', () => {
    frames.slice(1).forEach(({ offset }, batch) => {
      for (const length of EXTREMES) {
        const found = judged('length', with32(offset + 4, length));
        expect([batch, length, found]).toEqual([batch, length, batch === 0 ? 'TAKE_EMPTY' : batch * ROWS]);
      }
    });
  });

  it('that reads as an end mark is no end: something comes after it', () => {
    const file = join(folder, 'early.arrows');
    writeFileSync(file, with32((frames[2] as Frame).offset + 4, 0));
    const take = openTake(file);
    expect(isTakeFault(take) ? take : [take.lostBytes === null, take.rows]).toEqual([false, ROWS]);
  });

  it('of its schema is no take', () => {
    for (const length of EXTREMES)
      expect(['TAKE_FOREIGN', 'TAKE_EMPTY']).toContain(judged('schema', with32(4, length)));
  });

  it('inside its schema, where it would be thousands of millions of fields, is no take', () => {
    // Found by the law below: Arrow went on making fields until memory ended.
    expect(judged('fields', with32((frames[0] as Frame).offset + PREFIX_BYTES + 36, -1))).toBe('TAKE_FOREIGN');
  });

  it('anywhere in a message throws nothing, gives no row that was not written, and takes no memory it says it needs', () => {
    const place = fc.tuple(fc.nat(BATCHES), fc.nat(), fc.constantFrom(...EXTREMES));
    fc.assert(
      fc.property(place, ([which, nat, value]) => {
        const { offset, metadataBytes } = frames[which] as Frame;
        // Lengths, offsets and counts stand on four bytes, of which a long has two.
        const at = offset + PREFIX_BYTES + 4 * (nat % (metadataBytes / 4));
        const found = judged('anywhere', with32(at, value));
        return typeof found === 'string' || found <= BATCHES * ROWS;
      }),
      { numRuns: 400 },
    );
  });

  it('cut exactly between two batches says that its end is missing, and has every whole batch', () => {
    frames.slice(2).forEach(({ offset }, i) => {
      const file = join(folder, 'between.arrows');
      writeFileSync(file, bytes.subarray(0, offset));
      const take = openTake(file);
      expect(isTakeFault(take) ? take : [take.lostBytes, take.rows]).toEqual([0, (i + 1) * ROWS]);
    });
  });

  it('with a tail of zeros, as a crash of the file system leaves, is cut before the zeros, whole pages of them too', () => {
    for (const zeros of [1, 7, 8, 4_096, 1_000_000]) {
      const whole = bytes.subarray(0, bytes.length - 8);
      const file = join(folder, 'zeros.arrows');
      writeFileSync(file, Buffer.concat([whole, Buffer.alloc(zeros)]));
      const take = openTake(file);
      expect(isTakeFault(take) ? take : [take.lostBytes, take.rows]).toEqual([zeros, BATCHES * ROWS]);
    }
  });
});
