import { type RecordBatch, RecordBatchStreamWriter, type Schema } from 'apache-arrow';

/** What ends a stream: without it the file has been cut (Arrow columnar format, "IPC Streaming Format"). */
export const END_MARK = Uint8Array.of(0xff, 0xff, 0xff, 0xff, 0, 0, 0, 0);

/** An Arrow IPC stream as pieces of bytes, each of them one whole message. */
export interface ArrowStream {
  /** The schema's message. */
  readonly head: Uint8Array;
  /** One batch's message; the bytes are the caller's. */
  encode(batch: RecordBatch): Uint8Array;
}

/** Arrow's own writer with its sink taken out: messages are handed over whole, and nothing grows with their number. */
class Messages extends RecordBatchStreamWriter {
  #pieces: Uint8Array[] = [];

  take(): Uint8Array {
    const bytes = Buffer.concat(this.#pieces);
    this.#pieces = [];
    this._recordBatchBlocks = [];
    return bytes;
  }

  protected override _write(chunk: ArrayBufferView): this {
    this.#pieces?.push(new Uint8Array(chunk.buffer, chunk.byteOffset, chunk.byteLength));
    return this;
  }
}

export function arrowStream(schema: Schema): ArrowStream {
  const writer = new Messages();
  writer.reset(undefined, schema);
  const head = writer.take();
  return {
    head,
    encode(batch) {
      writer.write(batch);
      return writer.take();
    },
  };
}
