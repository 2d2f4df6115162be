import { pulseGrid, pulseSteps } from './pulse-grid.ts';
import type { Frame, OutputWiring } from './types.ts';

/** A command line, compiled: writes bytes straight into the buffer that leaves. */
export interface Template {
  readonly kind: 'template';
  /** Length of the longest line it can write. */
  readonly bytesMax: number;
  /** The numbers it writes, in order. */
  readonly fields: readonly TemplateField[];
  /** Writes the line of one command and `frame.sentUs`; returns its length. */
  write(frame: Frame, out: Uint8Array): number;
}

export interface TemplateMistake {
  readonly kind: 'mistake';
  readonly code: 'unclosed' | 'unopened' | 'form' | 'name' | 'decimals' | 'escape' | 'unsent';
  /** Where in the text, in UTF-16 units, zero-based. */
  readonly offset: number;
  readonly wrong: string;
  readonly remedy: string;
}

const DECIMALS_MAX = 4;
const POWERS = [1, 10, 100, 1_000, 10_000] as const;
/** Angles are written with at most this many digits before the point; beyond, they are held at the largest. */
const ANGLE_DIGITS = 4;
const ANGLE_MAX_DEG = 9_999;
const DEG_PER_RAD = 180 / Math.PI;
const ZERO = 0x30;
const MINUS = 0x2d;
const POINT = 0x2e;
const PLACEHOLDER = /^([^{}]+)\.(us|deg)(?::(\d+))?$/;

/** One number of the line. */
export interface TemplateField {
  readonly unit: 'us' | 'deg';
  /** Index of the servo (us) or of the joint (deg). */
  readonly index: number;
  readonly decimals: number;
}

/** With the text that follows it. */
interface Field extends TemplateField {
  readonly scale: number;
  readonly after: Uint8Array;
}

/**
 * Compiles a template against one follower. `{joint.us}` is the pulse of the joint's (first) servo, `{7.us}` that of
 * the servo on channel 7, `{joint.deg}` the joint's angle; `:2` sets the decimals (0 for us, 1 for deg). `{{` and `}}`
 * are braces.
 */
export function compileTemplate(text: string, output: OutputWiring): Template | TemplateMistake {
  const escape = escapeMistake(text);
  if (escape !== null) return escape;
  const literals: string[] = [''];
  const fields: Omit<Field, 'after'>[] = [];
  for (let at = 0; at < text.length; ) {
    const char = text[at] as string;
    if (char !== '{' && char !== '}') {
      literals[fields.length] += char;
      at++;
    } else if (text[at + 1] === char) {
      literals[fields.length] += char;
      at += 2;
    } else if (char === '}') {
      return mistake('unopened', at, '"}" closes nothing', 'write "}}" for a brace');
    } else {
      const close = text.indexOf('}', at);
      if (close < 0) return mistake('unclosed', at, '"{" is never closed', 'close it, or write "{{" for a brace');
      const field = compileField(text.slice(at + 1, close), at, output);
      if ('code' in field) return field;
      fields.push(field);
      literals.push('');
      at = close + 1;
    }
  }
  const unsent = output.servos.find((servo, index) => !fields.some((field) => carries(field, index, output)));
  if (unsent !== undefined) {
    const { joint, channel } = unsent;
    return mistake(
      'unsent',
      text.length,
      `servo ${channel} of ${joint} is never sent`,
      `add {${channel}.us} or {${joint}.deg}`,
    );
  }
  const bytes = literals.map((literal) => new TextEncoder().encode(literal));
  const whole = fields.map(
    // Key by key, because copies by spread come to differ inside the engine, and reading them then takes five times as long.
    ({ unit, index, decimals, scale }, k): Field => ({
      unit,
      index,
      decimals,
      scale,
      after: bytes[k + 1] as Uint8Array,
    }),
  );
  return assemble(bytes[0] as Uint8Array, whole, output);
}

/** YAML turns `\n` into a line end only in double quotes; otherwise a board waits for an end that never comes. */
export function escapeMistake(text: string): TemplateMistake | null {
  const escape = /\\[nrt]/.exec(text);
  if (escape === null) return null;
  return mistake('escape', escape.index, `"${escape[0]}" is two characters here`, 'write the text in double quotes');
}

function compileField(text: string, offset: number, output: OutputWiring): Omit<Field, 'after'> | TemplateMistake {
  const parts = PLACEHOLDER.exec(text);
  if (parts === null) {
    return mistake('form', offset, `"{${text}}" is no placeholder`, 'write {joint.us}, {joint.deg} or {joint.deg:2}');
  }
  const name = parts[1] as string;
  const unit = parts[2] as 'us' | 'deg';
  const decimals = parts[3] === undefined ? (unit === 'us' ? 0 : 1) : Number(parts[3]);
  if (decimals > DECIMALS_MAX) {
    return mistake('decimals', offset, `${decimals} decimals are too many`, `ask for ${DECIMALS_MAX} at most`);
  }
  const index = unit === 'us' ? servoNamed(name, output) : output.joints.indexOf(name);
  if (index < 0) {
    const joints = unit === 'us' ? output.servos.map((servo) => servo.joint) : output.joints;
    return mistake('name', offset, `there is no "${name}" to send`, `known: ${[...new Set(joints)].join(', ')}`);
  }
  return { unit, index, decimals, scale: POWERS[decimals] as number };
}

function servoNamed(name: string, output: OutputWiring): number {
  const ofJoint = output.servos.findIndex((servo) => servo.joint === name);
  return ofJoint >= 0 ? ofJoint : output.servos.findIndex((servo) => String(servo.channel) === name);
}

function carries(field: Omit<Field, 'after'>, servo: number, output: OutputWiring): boolean {
  if (field.unit === 'us') return field.index === servo;
  return output.joints[field.index] === output.servos[servo]?.joint;
}

function mistake(code: TemplateMistake['code'], offset: number, wrong: string, remedy: string): TemplateMistake {
  return { kind: 'mistake', code, offset, wrong, remedy };
}

function assemble(before: Uint8Array, fields: readonly Field[], output: OutputWiring): Template {
  const grids = POWERS.map((stepsPerUs) => pulseGrid(output.servos, stepsPerUs));

  const writeField = (field: Field, frame: Frame, out: Uint8Array, at: number): number => {
    const { index, decimals, scale } = field;
    if (field.unit === 'us') {
      const steps = pulseSteps(grids[decimals] as (typeof grids)[number], index, frame.pulsesUs[index] as number);
      frame.sentUs[index] = steps / scale;
      return writeFixed(steps, decimals, out, at);
    }
    const degrees = (frame.anglesRad[index] as number) * DEG_PER_RAD;
    if (Number.isNaN(degrees)) throw new RangeError(`angle of ${output.joints[index]} is not a number`);
    const held = Math.max(-ANGLE_MAX_DEG, Math.min(ANGLE_MAX_DEG, degrees));
    return writeFixed(Math.round(held * scale) | 0, decimals, out, at);
  };

  const copy = (bytes: Uint8Array, out: Uint8Array, at: number): number => {
    for (let index = 0; index < bytes.length; index++) out[at + index] = bytes[index] as number;
    return at + bytes.length;
  };

  return {
    kind: 'template',
    fields,
    bytesMax: fields.reduce((sum, field) => sum + fieldBytesMax(field, output) + field.after.length, before.length),
    write(frame, out) {
      // A servo that is only told by its joint's angle is turned by the board: no pulse of ours is rounded.
      for (let servo = 0; servo < output.servos.length; servo++) {
        frame.sentUs[servo] = frame.pulsesUs[servo] as number;
      }
      let at = copy(before, out, 0);
      for (let index = 0; index < fields.length; index++) {
        const field = fields[index] as Field;
        at = copy(field.after, out, writeField(field, frame, out, at));
      }
      return at;
    },
  };
}

function fieldBytesMax(field: Field, output: OutputWiring): number {
  const pointed = field.decimals > 0 ? field.decimals + 1 : 0;
  if (field.unit === 'deg') return 1 + ANGLE_DIGITS + pointed;
  const maxUs = output.servos[field.index]?.maxUs ?? 0;
  return String(Math.floor(maxUs)).length + pointed;
}

/** Writes `scaled / 10^decimals` in plain digits; returns where it ended. */
function writeFixed(scaled: number, decimals: number, out: Uint8Array, from: number): number {
  let at = from;
  let rest = scaled;
  if (rest < 0) {
    out[at++] = MINUS;
    rest = -rest;
  }
  let digits = decimals + 1;
  for (let bound = POWERS[decimals] as number; rest >= bound * 10; bound *= 10) digits++;
  const end = at + digits + (decimals > 0 ? 1 : 0);
  for (let digit = 0, write = end - 1; digit < digits; digit++, write--) {
    if (decimals > 0 && digit === decimals) out[write--] = POINT;
    out[write] = ZERO + (rest % 10);
    rest = (rest / 10) | 0;
  }
  return end;
}
