import { expect } from 'vitest';
import type { ReadFile } from '../../src/rig/file-reader.ts';
import { loadProfile, loadRig } from '../../src/rig/load.ts';
import type { LoadedRig } from '../../src/rig/load.ts';
import { mistakeLine } from '../../src/rig/mistake.ts';
import type { ProfileMistake } from '../../src/rig/mistake.ts';

/** Files by path, as if they stood on a disk. */
export type Files = Readonly<Record<string, string>>;

export function fromMemory(files: Files): ReadFile {
  return (file) => {
    const text = Object.hasOwn(files, file) ? files[file] : undefined;
    return text === undefined ? { fault: 'missing', detail: 'there is no such file' } : { text };
  };
}

/** A rig in two files that is without mistakes; tests change a line of it. */
export const RIG = `rig: yard
leader:
  leader: hand
  port: serial:/dev/hand?baud=115200
  wire: lines
  counts: [0, 1023]
  timeout_ms: 250
  joints:
    - name: shoulder
      channel: 1
      points: [[112, -120], [512, 0], [911, 120]]
      despike: 3
    - { name: elbow, channel: 2, points: [[100, -90], [900, 90]], travel_counts: [120, 880] }
  buttons:
    - { name: pedal, channel: 6, pressed: below, counts: 300, does: enable }
followers:
  - stork.yaml
`;

export const STORK = `follower: stork
port: serial:/dev/stork?baud=57600
wire: firmata
rate_hz: 50
join: { speed: 0.25, meet: move }
stop_category: 2
joints:
  - name: shoulder
    from: shoulder
    range_deg: [-60, 85]
    speed_deg_s: 60
    accel_deg_s2: 240
    rest_deg: -20
    servo: { channel: 5, points: [[-90, 560], [90, 2440]] }
  - name: elbow
    from: { elbow: 1, shoulder: -0.5 }
    range_deg: [-50, 5]
    speed_deg_s: 60
    accel_deg_s2: 240
servos:
  - { channel: 7, turns: { elbow: 1 }, points: [[-90, 560], [90, 2440]] }
poses: { bow: { shoulder: 40, elbow: -30 } }
`;

/** A text with one passage replaced; a passage that is not there, or twice, is a mistake of the test. */
export function edited(text: string, ...edits: readonly (readonly [string, string])[]): string {
  return edits.reduce((so, [from, to]) => {
    if (so.split(from).length !== 2) throw new Error(`"${from}" does not stand exactly once`);
    return so.replace(from, () => to);
  }, text);
}

export function mistakesIn(files: Files, file = 'rig.yaml'): readonly ProfileMistake[] {
  const loaded = loadProfile(file, fromMemory(files));
  return 'mistakes' in loaded ? loaded.mistakes : [];
}

export function linesIn(files: Files, file = 'rig.yaml'): readonly string[] {
  return mistakesIn(files, file).map(mistakeLine);
}

export function rigIn(files: Files, file = 'rig.yaml'): LoadedRig {
  const loaded = loadRig(file, fromMemory(files));
  expect('mistakes' in loaded ? loaded.mistakes.map(mistakeLine) : []).toEqual([]);
  return loaded as LoadedRig;
}
