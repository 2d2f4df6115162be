import { Field, Float32, Float64, Int16, Int64, Int8, Schema, Uint8, Utf8 } from 'apache-arrow';
import { STATES } from '../follower/states.ts';
import { headerMetadata, type TakeHeader } from './header.ts';
import { ROW_EVENTS, ROW_KEYS } from './row.ts';

/**
 * The columns of a take, in order. No dictionaries: a stream that is cut keeps all its whole batches readable. Codes are
 * explained in the metadata of their field, so that a reader needs nothing but the file.
 */
export type ColumnKind = 'time' | 'u8' | 'i8' | 'i16' | 'f32' | 'f64' | 'text';

export interface Column {
  readonly name: string;
  readonly kind: ColumnKind;
  /** Words of its codes, where it has any. */
  readonly words?: readonly string[];
}

const TYPES = {
  time: () => new Int64(),
  u8: () => new Uint8(),
  i8: () => new Int8(),
  i16: () => new Int16(),
  f32: () => new Float32(),
  f64: () => new Float64(),
  text: () => new Utf8(),
} as const;

/** Columns every take has, before those of its joints. */
export const FIXED = 8;

export function columns(header: TakeHeader): readonly Column[] {
  const { leader, followers } = header;
  return [
    { name: 't_us', kind: 'time' },
    { name: 'event', kind: 'u8', words: ROW_EVENTS },
    { name: 'key', kind: 'u8', words: ROW_KEYS },
    { name: 'follower', kind: 'i8', words: followers.map(({ name }) => name) },
    { name: 'kept', kind: 'u8' },
    { name: 'servo', kind: 'i16' },
    { name: 'value', kind: 'f64' },
    { name: 'name', kind: 'text' },
    ...leader.inputs.map((name): Column => ({ name: `leader.${name}.counts`, kind: 'f64' })),
    ...leader.joints.map((name): Column => ({ name: `leader.${name}.pose_rad`, kind: 'f64' })),
    ...followers.flatMap(({ name, joints }): Column[] => [
      { name: `${name}.commanded`, kind: 'u8' },
      { name: `${name}.state`, kind: 'u8', words: STATES },
      { name: `${name}.blocks`, kind: 'u8' },
      ...joints.flatMap(({ name: joint }): Column[] => [
        { name: `${name}.${joint}.target_rad`, kind: 'f32' },
        { name: `${name}.${joint}.angle_rad`, kind: 'f64' },
        { name: `${name}.${joint}.speed_rad_s`, kind: 'f32' },
        { name: `${name}.${joint}.limits`, kind: 'u8' },
      ]),
    ]),
  ];
}

/** Made once a stream: a second one, however equal, would make the writer begin another stream in the same file. */
export function takeSchema(header: TakeHeader, profiles: Parameters<typeof headerMetadata>[1]): Schema {
  const fields = columns(header).map(({ name, kind, words }) => {
    const metadata = words === undefined ? new Map<string, string>() : new Map([['codes', JSON.stringify(words)]]);
    return new Field(name, TYPES[kind](), false, metadata);
  });
  return new Schema(fields, headerMetadata(header, profiles));
}

/** Whether a stream's columns are those its header promises: the first that is not, or null. */
export function strangeColumn(header: TakeHeader, schema: Schema): string | null {
  const wanted = columns(header);
  for (const [i, { name, kind }] of wanted.entries()) {
    const field = schema.fields[i];
    if (field === undefined || field.name !== name || field.type.toString() !== TYPES[kind]().toString()) return name;
  }
  return schema.fields.length === wanted.length ? null : (schema.fields[wanted.length]?.name ?? '');
}

/** The column of names: the only one of text. */
const NAME_COLUMN = FIXED - 1;

/** Place of a column's values among a batch's buffers: two a column (validity, values), three for text, whose offsets these are. */
export function bufferOf(column: number): number {
  return 2 * column + (column > NAME_COLUMN ? 2 : 1);
}

export const TIME_BUFFER = bufferOf(0);
export const NAME_BUFFER = bufferOf(NAME_COLUMN) + 1;
