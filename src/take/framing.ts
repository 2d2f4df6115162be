/**
 * Where the messages of an Arrow IPC stream stand in a file, told from their frames alone: so a file that was cut, or whose
 * end a crash left as zeros, is never trusted further than it is whole. (Apache Arrow columnar format, "Encapsulated
 * message format" and Message.fbs; table layout: FlatBuffers internals.)
 */
export interface Frame {
  /** Of the whole message in the file, with its prefix. */
  readonly offset: number;
  readonly metadataBytes: number;
  readonly bodyBytes: number;
  readonly kind: 'schema' | 'batch' | 'other';
  /** Rows of a batch. */
  readonly rows: number;
  /** Where the batch's buffers asked for lie in its body; null: not inside it, or there is no such buffer. */
  readonly buffers: readonly (Span | null)[];
}

export interface Span {
  readonly offset: number;
  readonly bytes: number;
}

/** Reads `bytes` bytes at `offset`; fewer where the file ends. Reused: valid until the next call. */
export type ReadAt = (offset: number, bytes: number) => Uint8Array;

/** A frame; `end`: the end mark stands here; `broken`: nothing from here on can be trusted. */
export type FrameRead = Frame | 'end' | 'broken';

const PREFIX_BYTES = 8;
const CONTINUATION = 0xffff_ffff;
/** A hundred joints take some 50 KiB here; profiles add theirs to the schema. */
const METADATA_BYTES_MAX = 16 * 1024 * 1024;
/** A thousand rows of a hundred joints are 3 MiB; a damaged length must not become memory. */
const BODY_BYTES_MAX = 256 * 1024 * 1024;
const HIGH = 2 ** 32;
const SCHEMA = 1;
const BATCH = 3;

/**
 * @param size of the file, bytes
 * @param buffers of each batch that the caller wants to know the place of, counted as Arrow does
 */
export function frameAt(offset: number, size: number, read: ReadAt, buffers: readonly number[]): FrameRead {
  if (offset + PREFIX_BYTES > size) return 'broken';
  const prefix = view(read(offset, PREFIX_BYTES));
  if (prefix.byteLength < PREFIX_BYTES || prefix.getUint32(0, true) !== CONTINUATION) return 'broken';
  const metadataBytes = prefix.getInt32(4, true);
  if (metadataBytes === 0) return 'end';
  if (metadataBytes < 0 || metadataBytes > METADATA_BYTES_MAX || metadataBytes % 8 !== 0) return 'broken';
  const body = offset + PREFIX_BYTES + metadataBytes;
  if (body > size) return 'broken';
  const message = messageOf(view(read(offset + PREFIX_BYTES, metadataBytes)), buffers);
  if (message === null || message.bodyBytes < 0 || message.bodyBytes > BODY_BYTES_MAX) return 'broken';
  if (body + message.bodyBytes > size) return 'broken';
  return { offset, metadataBytes, ...message };
}

/** Where its body begins in the file. */
export function bodyAt({ offset, metadataBytes }: Frame): number {
  return offset + PREFIX_BYTES + metadataBytes;
}

export function frameEnd(frame: Frame): number {
  return bodyAt(frame) + frame.bodyBytes;
}

type Message = Pick<Frame, 'kind' | 'bodyBytes' | 'rows' | 'buffers'>;

/** Message { version, header type, header, bodyLength }; null where the bytes are no message. */
function messageOf(data: DataView, wanted: readonly number[]): Message | null {
  try {
    const root = data.getUint32(0, true);
    const type = fieldAt(data, root, 1);
    const header = fieldAt(data, root, 2);
    const body = fieldAt(data, root, 3);
    const code = type === null ? 0 : data.getUint8(type);
    const bodyBytes = body === null ? 0 : int64(data, body);
    if (code !== BATCH || header === null)
      return { kind: code === SCHEMA ? 'schema' : 'other', bodyBytes, rows: 0, buffers: [] };
    return batchOf(data, header + data.getUint32(header, true), bodyBytes, wanted);
  } catch (error) {
    // A position outside the bytes.
    if (error instanceof RangeError) return null;
    throw error;
  }
}

/** RecordBatch { length, nodes, buffers: [{ offset, length }], compression } */
function batchOf(data: DataView, table: number, bodyBytes: number, wanted: readonly number[]): Message | null {
  const length = fieldAt(data, table, 0);
  const field = fieldAt(data, table, 2);
  const isCompressed = fieldAt(data, table, 3) !== null;
  const rows = length === null ? 0 : int64(data, length);
  if (isCompressed || field === null || rows < 0) return null;
  const vector = field + data.getUint32(field, true);
  const count = data.getUint32(vector, true);
  const buffers = wanted.map((i) => (i < count ? spanAt(data, vector + 4 + 16 * i, bodyBytes) : null));
  return { kind: 'batch', bodyBytes, rows, buffers };
}

function spanAt(data: DataView, at: number, bodyBytes: number): Span | null {
  const offset = int64(data, at);
  const bytes = int64(data, at + 8);
  return offset < 0 || bytes < 0 || offset + bytes > bodyBytes ? null : { offset, bytes };
}

/** Exact below 2^53; no BigInt for each of a thousand numbers. */
function int64(data: DataView, at: number): number {
  return data.getInt32(at + 4, true) * HIGH + data.getUint32(at, true);
}

/** Where field `id` of the table at `table` stands, or null where it has its default. */
export function fieldAt(data: DataView, table: number, id: number): number | null {
  const vtable = table - data.getInt32(table, true);
  const slot = 4 + 2 * id;
  if (slot >= data.getUint16(vtable, true)) return null;
  const at = data.getUint16(vtable + slot, true);
  return at === 0 ? null : table + at;
}

function view(bytes: Uint8Array): DataView {
  return new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
}
