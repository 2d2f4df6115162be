import { fieldAt } from './framing.ts';

/**
 * Whether every vector and string of a schema's message lies inside it, and there are no more tables than its bytes can hold.
 * Arrow's own reader believes what it finds there: a damaged length would make it build fields until memory ends. (Apache
 * Arrow, Schema.fbs: Schema { endianness, fields, custom_metadata }, Field { name, nullable, type_type, type, dictionary,
 * children, custom_metadata }, KeyValue { key, value }.)
 * @param data the metadata of the message, without its prefix
 */
export function isBoundedSchema(data: DataView): boolean {
  let tables = data.byteLength / TABLE_BYTES_MIN;

  /** Where the elements of the vector in field `id` begin, and how many there are. */
  const vectorOf = (
    table: number,
    id: number,
    elementBytes: number,
  ): { readonly at: number; readonly count: number } => {
    const field = fieldAt(data, table, id);
    if (field === null) return { at: 0, count: 0 };
    const vector = field + data.getUint32(field, true);
    const count = data.getUint32(vector, true);
    if (vector + 4 + count * elementBytes > data.byteLength) throw new RangeError('a vector ends outside its message');
    return { at: vector + 4, count };
  };
  const eachTable = (table: number, id: number, look: (inner: number) => void): void => {
    const { at, count } = vectorOf(table, id, 4);
    tables -= count;
    if (tables < 0) throw new RangeError('more tables than bytes');
    for (let i = 0; i < count; i++) look(at + 4 * i + data.getUint32(at + 4 * i, true));
  };
  const pair = (table: number): void => {
    vectorOf(table, 0, 1);
    vectorOf(table, 1, 1);
  };
  const field = (table: number): void => {
    vectorOf(table, 0, 1);
    eachTable(table, 5, field);
    eachTable(table, 6, pair);
  };

  try {
    const root = data.getUint32(0, true);
    const header = fieldAt(data, root, 2);
    if (header === null) return false;
    const schema = header + data.getUint32(header, true);
    eachTable(schema, 1, field);
    eachTable(schema, 2, pair);
    return true;
  } catch (error) {
    if (error instanceof RangeError) return false;
    throw error;
  }
}

/** An offset in a vector and one to its layout: no table takes less. */
const TABLE_BYTES_MIN = 8;
