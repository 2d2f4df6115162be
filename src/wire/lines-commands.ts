import type { LinesCommands } from './lines-options.ts';
import { compileTemplate, type Template, type TemplateMistake } from './template.ts';
import type { Frame, OutputWiring } from './types.ts';

/** One follower's side of the `lines` wire. */
export interface LinesWriter {
  readonly bytesMax: number;
  encode(frame: Frame, out: Uint8Array): number;
  limp(out: Uint8Array): number;
  power(on: boolean, out: Uint8Array): number;
}

/** The template this output speaks by, compiled; null when it has none. */
export function templateOf(common: LinesCommands, output: OutputWiring): Template | TemplateMistake | null {
  const { template } = output.lines ?? common;
  return template === null ? null : compileTemplate(template, output);
}

/** Throws on a mistaken template: the rig is checked before any session opens. */
export function linesWriter(common: LinesCommands, output: OutputWiring): LinesWriter {
  const texts = output.lines ?? common;
  const template = templateOf(common, output);
  if (template?.kind === 'mistake') throw new Error(`template of ${output.follower}: ${template.wrong}`);
  const limp = utf8(texts.limp);
  const powerOn = utf8(texts.powerOn);
  const powerOff = utf8(texts.powerOff);
  return {
    bytesMax: Math.max(template?.bytesMax ?? 0, limp.length, powerOn.length, powerOff.length),
    encode: (frame, out) => template?.write(frame, out) ?? 0,
    limp: (out) => put(limp, out),
    power: (on, out) => put(on ? powerOn : powerOff, out),
  };
}

function utf8(text: string | null): Uint8Array {
  return new TextEncoder().encode(text ?? '');
}

function put(text: Uint8Array, out: Uint8Array): number {
  out.set(text);
  return text.length;
}
