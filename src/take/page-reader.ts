import { bufferOf, type ColumnKind, columns, FIXED, NAME_BUFFER } from './columns.ts';
import type { Frame, Span } from './framing.ts';
import type { TakeHeader } from './header.ts';
import { NAME_BYTES_MAX, row as makeRow, type Row, type RowFollower } from './row.ts';

/** The rows of a batch, read where its columns lie in its bytes: no vector is built and no number is boxed. */
export interface PageReader {
  /** The buffers whose places it wants to know. */
  readonly buffers: readonly number[];
  /** Looks at this batch from now on; false where a column lacks values, or time goes back. */
  open(frame: Frame, body: Uint8Array): boolean;
  /** Row `r` of it, reused. */
  row(r: number): Row;
}

const HIGH = 2 ** 32;
const BYTES: Readonly<Record<ColumnKind, number>> = { time: 8, u8: 1, i8: 1, i16: 2, f32: 4, f64: 8, text: 4 };
/** Buffers begin at multiples of this (Arrow columnar format, "Buffer Alignment and Padding"). */
const ALIGNMENT = 8;

/** A follower's columns. */
interface Arm {
  readonly first: number;
  readonly joints: number;
  commanded: Uint8Array;
  state: Uint8Array;
  blocks: Uint8Array;
  readonly target: Float32Array[];
  readonly angle: Float64Array[];
  readonly speed: Float32Array[];
  readonly limits: Uint8Array[];
}

export function pageReader(header: TakeHeader): PageReader {
  const layout = columns(header);
  const buffers = [...layout.map((_, i) => bufferOf(i)), NAME_BUFFER];
  const inputs = header.leader.inputs.length;
  const joints = header.leader.joints.length;
  const none: Uint8Array = new Uint8Array(0);
  let next = FIXED + inputs + joints;
  const arms = header.followers.map(({ joints: own }): Arm => {
    const first = next;
    next += 3 + 4 * own.length;
    const lists = { target: [], angle: [], speed: [], limits: [] };
    return { first, joints: own.length, commanded: none, state: none, blocks: none, ...lists };
  });
  const row = makeRow(header);
  const decoder = new TextDecoder();
  let time: Int32Array = new Int32Array(0);
  let event = none;
  let key = none;
  let follower: Int8Array = new Int8Array(0);
  let kept = none;
  let servo: Int16Array = new Int16Array(0);
  let value: Float64Array = new Float64Array(0);
  let offsets: Int32Array = new Int32Array(0);
  let text = none;
  const counts: Float64Array[] = [];
  const pose: Float64Array[] = [];
  let rows = 0;

  const isSound = (spans: Frame['buffers']): boolean =>
    layout.every(({ kind }, i) => {
      const span = spans[i] ?? null;
      const wanted = BYTES[kind] * (kind === 'text' ? rows + 1 : rows);
      return span !== null && span.offset % ALIGNMENT === 0 && span.bytes >= wanted;
    });

  const openArm = (arm: Arm, at: (column: number) => number, { buffer }: Uint8Array): void => {
    arm.commanded = new Uint8Array(buffer, at(arm.first), rows);
    arm.state = new Uint8Array(buffer, at(arm.first + 1), rows);
    arm.blocks = new Uint8Array(buffer, at(arm.first + 2), rows);
    for (let j = 0, column = arm.first + 3; j < arm.joints; j++, column += 4) {
      arm.target[j] = new Float32Array(buffer, at(column), rows);
      arm.angle[j] = new Float64Array(buffer, at(column + 1), rows);
      arm.speed[j] = new Float32Array(buffer, at(column + 2), rows);
      arm.limits[j] = new Uint8Array(buffer, at(column + 3), rows);
    }
  };

  return {
    buffers,
    open(frame, body) {
      const { buffers: spans } = frame;
      rows = frame.rows;
      const names = spans[buffers.indexOf(NAME_BUFFER)] ?? null;
      if (body.byteOffset % ALIGNMENT !== 0 || names === null || !isSound(spans)) return false;
      const { buffer } = body;
      const at = (column: number): number => body.byteOffset + (spans[column] as Span).offset;
      time = new Int32Array(buffer, at(0), 2 * rows);
      event = new Uint8Array(buffer, at(1), rows);
      key = new Uint8Array(buffer, at(2), rows);
      follower = new Int8Array(buffer, at(3), rows);
      kept = new Uint8Array(buffer, at(4), rows);
      servo = new Int16Array(buffer, at(5), rows);
      value = new Float64Array(buffer, at(6), rows);
      offsets = new Int32Array(buffer, at(7), rows + 1);
      text = body.subarray(names.offset, names.offset + names.bytes);
      for (let i = 0; i < inputs; i++) counts[i] = new Float64Array(buffer, at(FIXED + i), rows);
      for (let j = 0; j < joints; j++) pose[j] = new Float64Array(buffer, at(FIXED + inputs + j), rows);
      for (const arm of arms) openArm(arm, at, body);
      return goesForward(time);
    },
    row(r) {
      row.tUs = stampOf(time, r);
      row.event = event[r] as number;
      row.key = key[r] as number;
      row.follower = follower[r] as number;
      row.kept = kept[r] as number;
      row.servo = servo[r] as number;
      row.value = value[r] as number;
      const begin = offsets[r] as number;
      const end = offsets[r + 1] as number;
      row.name = begin === end ? '' : decoder.decode(text.subarray(begin, Math.min(end, begin + NAME_BYTES_MAX)));
      for (let i = 0; i < inputs; i++) row.counts[i] = (counts[i] as Float64Array)[r] as number;
      for (let j = 0; j < joints; j++) row.poseRad[j] = (pose[j] as Float64Array)[r] as number;
      for (let f = 0; f < arms.length; f++) readArm(row.followers[f] as RowFollower, arms[f] as Arm, r);
      return row;
    },
  };
}

function readArm(to: RowFollower, arm: Arm, r: number): void {
  to.commanded = arm.commanded[r] as number;
  to.state = arm.state[r] as number;
  to.blocks = arm.blocks[r] as number;
  for (let j = 0; j < arm.joints; j++) {
    to.targetRad[j] = (arm.target[j] as Float32Array)[r] as number;
    to.angleRad[j] = (arm.angle[j] as Float64Array)[r] as number;
    to.speedRadS[j] = (arm.speed[j] as Float32Array)[r] as number;
    to.limits[j] = (arm.limits[j] as Uint8Array)[r] as number;
  }
}

/** The 64-bit stamps are read as pairs of 32-bit halves, little end first: a BigInt a row would be garbage a row. */
function stampOf(halves: Int32Array, r: number): number {
  return (halves[2 * r + 1] as number) * HIGH + ((halves[2 * r] as number) >>> 0);
}

function goesForward(halves: Int32Array): boolean {
  let before = 0;
  for (let r = 0; 2 * r < halves.length; r++) {
    const tUs = stampOf(halves, r);
    if (tUs < before || tUs > Number.MAX_SAFE_INTEGER) return false;
    before = tUs;
  }
  return true;
}
