import { makeData, RecordBatch, type Schema, Struct } from 'apache-arrow';
import { type Column, columns, FIXED } from './columns.ts';
import type { TakeHeader } from './header.ts';
import { NAME_BYTES_MAX, type Row, type RowFollower } from './row.ts';

/** Rows of a take on their way into one batch, column by column in arrays made once. */
export interface Page {
  readonly rows: number;
  readonly full: boolean;
  append(row: Row): void;
  /** The rows so far as a batch that looks into this page's own arrays: encode it before the next row. */
  batch(): RecordBatch;
  clear(): void;
}

/** Text in one page: marks and edits are rare; what does not fit is cut. */
const TEXT_BYTES = NAME_BYTES_MAX;
const HIGH = 2 ** 32;

type Numbers = Uint8Array | Int8Array | Int16Array | Float32Array | Float64Array;

export function page(header: TakeHeader, schema: Schema, capacity: number): Page {
  const layout = columns(header);
  const time = new Int32Array(2 * capacity);
  const offsets = new Int32Array(capacity + 1);
  const text = new Uint8Array(TEXT_BYTES);
  const encoder = new TextEncoder();
  const values = layout.map(({ kind }) => numbers(kind, capacity));
  const at = (from: number, step: number, count: number): Numbers[] =>
    Array.from({ length: count }, (_, i) => values[from + i * step] as Numbers);

  const [, event, key, follower, kept, servo, value] = values as Numbers[];
  const inputs = header.leader.inputs.length;
  const counts = at(FIXED, 1, inputs);
  const pose = at(FIXED + inputs, 1, header.leader.joints.length);
  let next = FIXED + inputs + header.leader.joints.length;
  const arms = header.followers.map(({ joints }) => {
    const first = next;
    const n = joints.length;
    next += 3 + 4 * n;
    return {
      commanded: values[first] as Numbers,
      state: values[first + 1] as Numbers,
      blocks: values[first + 2] as Numbers,
      target: at(first + 3, 4, n),
      angle: at(first + 4, 4, n),
      speed: at(first + 5, 4, n),
      limits: at(first + 6, 4, n),
    };
  });
  let rows = 0;

  const put = (columnsOf: readonly Numbers[], from: Float64Array | Uint8Array): void => {
    for (let i = 0; i < columnsOf.length; i++) (columnsOf[i] as Numbers)[rows] = from[i] as number;
  };

  return {
    get rows() {
      return rows;
    },
    get full() {
      return rows === capacity;
    },
    append(from) {
      const { tUs } = from;
      // A 64-bit integer written as two halves, little end first: a BigInt a row would be garbage a row.
      time[2 * rows] = tUs | 0;
      time[2 * rows + 1] = Math.floor(tUs / HIGH);
      (event as Numbers)[rows] = from.event;
      (key as Numbers)[rows] = from.key;
      (follower as Numbers)[rows] = from.follower;
      (kept as Numbers)[rows] = from.kept;
      (servo as Numbers)[rows] = from.servo;
      (value as Numbers)[rows] = from.value;
      const begin = offsets[rows] as number;
      offsets[rows + 1] =
        from.name === '' ? begin : begin + encoder.encodeInto(from.name, text.subarray(begin)).written;
      put(counts, from.counts);
      put(pose, from.poseRad);
      for (let f = 0; f < arms.length; f++) {
        const arm = arms[f] as (typeof arms)[number];
        const source = from.followers[f] as RowFollower;
        arm.commanded[rows] = source.commanded;
        arm.state[rows] = source.state;
        arm.blocks[rows] = source.blocks;
        put(arm.target, source.targetRad);
        put(arm.angle, source.angleRad);
        put(arm.speed, source.speedRadS);
        put(arm.limits, source.limits);
      }
      rows++;
    },
    batch() {
      const children = schema.fields.map((field, i) => {
        const common = { type: field.type, length: rows, nullCount: 0 };
        if (i === 0) return makeData({ ...common, data: new BigInt64Array(time.buffer, 0, rows) });
        if (layout[i]?.kind === 'text')
          return makeData({
            ...common,
            valueOffsets: offsets.subarray(0, rows + 1),
            data: text.subarray(0, offsets[rows]),
          });
        return makeData({ ...common, data: (values[i] as Numbers).subarray(0, rows) });
      });
      return new RecordBatch(
        schema,
        makeData({ type: new Struct(schema.fields), length: rows, nullCount: 0, children }),
      );
    },
    clear() {
      rows = 0;
    },
  };
}

/** Time and text have arrays of their own. */
function numbers(kind: Column['kind'], capacity: number): Numbers | null {
  switch (kind) {
    case 'u8':
      return new Uint8Array(capacity);
    case 'i8':
      return new Int8Array(capacity);
    case 'i16':
      return new Int16Array(capacity);
    case 'f32':
      return new Float32Array(capacity);
    case 'f64':
      return new Float64Array(capacity);
    case 'time':
    case 'text':
      return null;
  }
}
