import type { LinesOptions } from '../wire/lines-options.ts';
import type { BoardPlan, OutputWiring } from '../wire/types.ts';
import type { Pins } from './firmware.ts';
import type { ArmOptions, ArmServoOptions } from './servo-arm.ts';

/** A sketch's buffer; a longer line is thrown away. */
const LINE_CHARS_MAX = 256;
const DEG = Math.PI / 180;
const NUMBER = String.raw`(-?\d+(?:\.\d+)?)`;
const TOKENS = /(\{\{|\}\}|\{[^{}]+\})/;
const PLACE = /^\{(.+)\.(us|deg)(?::\d+)?\}$/;

/** One line the sketch knows, and what it does when it hears it. */
interface KnownLine {
  readonly pattern: RegExp;
  readonly isCommand: boolean;
  readonly obey: (numbers: readonly number[]) => void;
}

/** A number of a command line. */
interface Place {
  readonly name: string;
  readonly unit: 'us' | 'deg';
}

/**
 * Hears command lines, in any portions, and moves what they name. A template has to end in some text: a sketch that
 * waits for a number to end by itself would have to wait for the next one.
 */
export function linesReader(
  options: LinesOptions,
  plan: BoardPlan,
  arms: readonly ArmOptions[],
  pins: Pins,
): (bytes: Uint8Array) => void {
  const known = plan.outputs.flatMap((wiring, output) =>
    knownLines(options, wiring, output, (arms[output] as ArmOptions).servos, pins),
  );
  let line = '';

  const obeyed = (): boolean => {
    for (const { pattern, isCommand, obey } of known) {
      const match = pattern.exec(line);
      if (match === null) continue;
      if (!isCommand || !pins.loses()) obey(match.slice(1).map(Number));
      return true;
    }
    return false;
  };

  return (bytes) => {
    for (const byte of bytes) {
      const letter = String.fromCharCode(byte);
      line += letter;
      if (obeyed() || letter === '\n' || line.length >= LINE_CHARS_MAX) line = '';
    }
  };
}

function knownLines(
  options: LinesOptions,
  wiring: OutputWiring,
  output: number,
  servos: readonly ArmServoOptions[],
  pins: Pins,
): KnownLine[] {
  const { template, limp, powerOn, powerOff } = wiring.lines ?? options;
  const anglesRad = new Float64Array(wiring.joints.length);
  const said = (text: string | null, obey: () => void): KnownLine[] =>
    linesOf(text).map((line) => ({ pattern: new RegExp(`^${escaped(line)}$`), isCommand: false, obey }));
  return [
    ...linesOf(template).map((line) => {
      const { pattern, places } = commandPattern(line);
      return { pattern, isCommand: true, obey: obedience(places, anglesRad, wiring, output, servos, pins) };
    }),
    ...said(limp, () => servos.forEach((_, servo) => pins.pulse(output, servo, Number.NaN))),
    ...said(powerOn, () => pins.power(output, true)),
    ...said(powerOff, () => pins.power(output, false)),
  ];
}

function linesOf(text: string | null): string[] {
  return text === null || text === '' ? [] : text.split(/(?<=\n)/);
}

function commandPattern(template: string): { pattern: RegExp; places: Place[] } {
  const places: Place[] = [];
  const parts = template.split(TOKENS).map((token) => {
    const place = PLACE.exec(token);
    if (place === null) return escaped(token.replace(/^(\{\{|\}\})$/, (brace) => brace.charAt(0)));
    places.push({ name: place[1] as string, unit: place[2] as Place['unit'] });
    return NUMBER;
  });
  return { pattern: new RegExp(`^${parts.join('')}$`), places };
}

/**
 * Microseconds go straight to the servo; degrees through each servo's own map, as a sketch would have it.
 * @param anglesRad what the output's joints were told last, over all its lines
 */
function obedience(
  places: readonly Place[],
  anglesRad: Float64Array,
  wiring: OutputWiring,
  output: number,
  servos: readonly ArmServoOptions[],
  pins: Pins,
): KnownLine['obey'] {
  const servoOf = places.map(({ name, unit }) => (unit === 'us' ? servoNamed(wiring, name) : -1));
  const jointOf = places.map(({ name, unit }) => (unit === 'deg' ? wiring.joints.indexOf(name) : -1));
  const turned = wiring.servos.map(({ joint }) => jointOf.includes(wiring.joints.indexOf(joint)));

  return (numbers) => {
    numbers.forEach((value, place) => {
      const servo = servoOf[place] as number;
      if (servo >= 0) pins.pulse(output, servo, value);
      else anglesRad[jointOf[place] as number] = value * DEG;
    });
    servos.forEach(({ turns, map }, servo) => {
      if (turned[servo] !== true || servoOf.includes(servo)) return;
      const angleRad = turns.reduce((sum, turn) => sum + turn.weight * (anglesRad[turn.joint] as number), 0);
      pins.pulse(output, servo, map.value(angleRad));
    });
  };
}

/** A name is a joint, which stands for its first servo, or a servo's channel. */
function servoNamed(wiring: OutputWiring, name: string): number {
  const ofJoint = wiring.servos.findIndex(({ joint }) => joint === name);
  return ofJoint >= 0 ? ofJoint : wiring.servos.findIndex(({ channel }) => String(channel) === name);
}

function escaped(text: string): string {
  return text.replace(/[\\^$.*+?()[\]{}|/]/g, String.raw`\$&`);
}
