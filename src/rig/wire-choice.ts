import type { WireChoice } from '../wire/choice.ts';
import type { LinesCommands } from '../wire/lines-options.ts';
import type { FollowerProfile } from './schema/follower.ts';
import type { Loose } from './shape.ts';

type WireKey = FollowerProfile['wire'];

/** The name of the wire as a file gives it; null where that is malformed. */
export function wireName(wire: Loose<WireKey> | undefined): WireChoice['name'] | null {
  if (wire === undefined) return null;
  return typeof wire === 'string' ? wire : 'lines';
}

/** The wire with its options: what is absent stands for what most sketches do. */
export function wireChoice(wire: Loose<WireKey>): WireChoice {
  if (wire === 'frames' || wire === 'firmata') return { name: wire };
  const keys = linesKeys(wire);
  const { separator, sends, checksum } = keys;
  const received = { separator: separator ?? null, sends: sends ?? 'always', checksum: checksum ?? null };
  return { name: 'lines', lines: { ...received, ...linesCommands(keys) } };
}

/** A follower's own texts, because several followers may share a board; null on wires without texts. */
export function commandsOf(wire: Loose<WireKey> | undefined): LinesCommands | null {
  return wireName(wire) === 'lines' ? linesCommands(linesKeys(wire)) : null;
}

type LinesKeys = Loose<Exclude<WireKey, string>['lines']>;

function linesKeys(wire: Loose<WireKey> | undefined): LinesKeys {
  return (typeof wire === 'object' ? wire.lines : undefined) ?? {};
}

function linesCommands({ template, limp, power_on: powerOn, power_off: powerOff }: LinesKeys): LinesCommands {
  return { template: template ?? null, limp: limp ?? null, powerOn: powerOn ?? null, powerOff: powerOff ?? null };
}
