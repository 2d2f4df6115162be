import type { RecordBatch } from 'apache-arrow';
import { columns, FIXED } from './columns.ts';
import type { TakeHeader } from './header.ts';
import { row as makeRow, type Row, type RowFollower } from './row.ts';

type Numbers = { readonly [index: number]: number };

/** The rows of a batch one after another, in a row that is reused. */
export interface PageReader {
  rows(batch: RecordBatch): Generator<Row>;
}

const HIGH = 2 ** 32;

export function pageReader(header: TakeHeader): PageReader {
  const count = columns(header).length;
  const inputs = header.leader.inputs.length;
  const joints = header.leader.joints.length;
  const arms: { first: number; n: number }[] = [];
  let next = FIXED + inputs + joints;
  for (const { joints: own } of header.followers) {
    arms.push({ first: next, n: own.length });
    next += 3 + 4 * own.length;
  }
  const row = makeRow(header);
  const decoder = new TextDecoder();

  return {
    *rows(batch) {
      const { children } = batch.data;
      const values = Array.from({ length: count }, (_, i) => children[i]?.values as Numbers);
      const [, event, key, follower, kept, servo, value] = values as [Numbers, ...Numbers[]];
      const time = halves(children[0]?.values as BigInt64Array);
      const offsets = children[FIXED - 1]?.valueOffsets as Int32Array;
      const text = children[FIXED - 1]?.values as Uint8Array;
      const columnOf = (i: number): Numbers => values[i] as Numbers;

      for (let r = 0; r < batch.numRows; r++) {
        row.tUs = whole64(time, 2 * r);
        row.event = event?.[r] as number;
        row.key = key?.[r] as number;
        row.follower = follower?.[r] as number;
        row.kept = kept?.[r] as number;
        row.servo = servo?.[r] as number;
        row.value = value?.[r] as number;
        const begin = offsets[r] as number;
        const end = offsets[r + 1] as number;
        row.name = begin === end ? '' : decoder.decode(text.subarray(begin, end));
        for (let i = 0; i < inputs; i++) row.counts[i] = columnOf(FIXED + i)[r] as number;
        for (let j = 0; j < joints; j++) row.poseRad[j] = columnOf(FIXED + inputs + j)[r] as number;
        for (let f = 0; f < arms.length; f++) readFollower(row.followers[f] as RowFollower, arms, f, values, r);
        yield row;
      }
    },
  };
}

function readFollower(
  to: RowFollower,
  arms: readonly { readonly first: number; readonly n: number }[],
  f: number,
  values: readonly Numbers[],
  r: number,
): void {
  const { first, n } = arms[f] as (typeof arms)[number];
  const of = (i: number): number => (values[i] as Numbers)[r] as number;
  to.commanded = of(first);
  to.state = of(first + 1);
  to.blocks = of(first + 2);
  for (let j = 0, at = first + 3; j < n; j++, at += 4) {
    to.targetRad[j] = of(at);
    to.angleRad[j] = of(at + 1);
    to.speedRadS[j] = of(at + 2);
    to.limits[j] = of(at + 3);
  }
}

/** The 64-bit stamps as pairs of 32-bit halves, little end first: no BigInt a row. */
export function halves(stamps: BigInt64Array): Int32Array {
  return new Int32Array(stamps.buffer, stamps.byteOffset, 2 * stamps.length);
}

export function whole64(parts: Int32Array, at: number): number {
  return (parts[at + 1] as number) * HIGH + ((parts[at] as number) >>> 0);
}
