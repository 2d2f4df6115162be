import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { loadRig } from '../../src/rig/load.ts';

/**
 * A small rig whose sums can be done by hand: 0 to 1000 counts are -100 to 100 degrees, and a servo takes 1500 us for 0
 * degrees and 10 us a degree more.
 */
export interface SmallRig {
  readonly leaderPort?: string;
  /** Lines of the leader's profile, in flow style: `buttons: [...]`. */
  readonly leaderKeys?: string;
  readonly followers?: readonly SmallFollower[];
}

export interface SmallFollower {
  readonly name: string;
  readonly port?: string;
  /** Over the defaults below. */
  readonly keys?: string;
  readonly base?: string;
  readonly elbow?: string;
}

const JOINT = 'range_deg: [-40, 40], speed_deg_s: 60, accel_deg_s2: 240';
const POINTS = '[[-50, 1000], [50, 2000]]';

export function smallRigText({ leaderPort = 'sim:hand?seed=7', leaderKeys, followers }: SmallRig = {}): string {
  const all = followers ?? [{ name: 'wren' }];
  return [
    'rig: small',
    `leader: { leader: stick, port: "${leaderPort}", wire: lines, counts: [0, 1000], timeout_ms: 250,`,
    '  joints: [{ name: base, channel: 0, points: [[0, -100], [1000, 100]] },',
    '    { name: elbow, channel: 1, points: [[0, -100], [1000, 100]] }]',
    `  ${leaderKeys === undefined ? '' : `, ${leaderKeys}`} }`,
    'followers:',
    ...all.map(({ name, port, keys, base, elbow }) =>
      [
        `  - { follower: ${name}, port: "${port ?? `sim:arm?name=${name}`}", rate_hz: 50,`,
        `      wire: { lines: { template: "{base.us},{elbow.us}\\n" } }, ${keys ?? 'wake: ask'},`,
        `      joints: [{ name: base, from: base, ${base ?? JOINT}, servo: { channel: 0, points: ${POINTS} } },`,
        `        { name: elbow, from: elbow, ${elbow ?? JOINT}, servo: { channel: 1, points: ${POINTS} } }] }`,
      ].join('\n'),
    ),
    '',
  ].join('\n');
}

export function smallRig(options: SmallRig = {}): CompiledRig {
  const loaded = loadRig('small.yaml', () => ({ text: smallRigText(options) }));
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes, null, 1));
  return loaded.rig;
}

/** A folder that is there for one test file. */
export function scratch(): { write(name: string, text: string): string; path(name: string): string; remove(): void } {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-cli-'));
  return {
    path: (name) => join(folder, name),
    write(name, text) {
      writeFileSync(join(folder, name), text);
      return join(folder, name);
    },
    remove: () => rmSync(folder, { recursive: true }),
  };
}
