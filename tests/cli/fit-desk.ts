import { readdirSync, readFileSync, rmSync } from 'node:fs';
import { dirname } from 'node:path';
import { fitFromCaptures, type FitOptions } from '../../src/cli/fit.ts';
import { filesOnDisk } from '../../src/cli/fit-files.ts';
import { random } from '../../src/sim/random.ts';
import { scratch } from './rigs.ts';

export const RIG =
  'rig: bench\nleader: leader.yaml # the stick\nfollowers: [wren.yaml, { like: wren.yaml, follower: robin, port: "sim:arm?name=robin" }]\n';
export const LEADER = `# pots
leader: stick
port: sim:hand
wire: lines
counts: [0, 1023]
joints:
  - name: base            # a comment that stays
    channel: 0
    points: [[100, -100], [900, 100]]    # first guess
  - { name: elbow, channel: 1, points: [[100, -100], [900, 100]], travel_counts: [90, 910] }
`;
export const WREN = `follower: wren
port: sim:arm?name=wren
wire: { lines: { template: "{base.us},{elbow.us}\\n" } }
wake: ask
joints:
  - { name: base, from: base, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 0, points: [[-90, 600], [90, 2400]] } }
  - { name: elbow, from: { base: 1, elbow: 1 }, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 1, points: [[-90, 600], [90, 2400]] } }
`;

/** What a fit asks for that asks for nothing beyond. */
export const PLAIN = { json: false, dryRun: false, partly: false, report: undefined, smooth: false } as const;

export const HEADER = 'step,arm,joint,counts,pulse_us,known_deg\n';
/** Points of a straight pot, 4 counts a degree, read a little wrong. */
export const points = (joint: string, wrongAt?: number): string => {
  const chance = random(5, joint.length);
  return [-100, -75, -50, -25, 0, 25, 50, 75, 100]
    .map((deg) => {
      const counts = 500 + 4 * deg + chance.between(-1, 1) + (deg === wrongAt ? 60 : 0);
      return `leader-point,stick,${joint},${counts.toFixed(1)},,${deg}\n`;
    })
    .join('');
};

/** A folder with that rig in it, fresh for each test. */
export interface FitDesk {
  readonly rig: string;
  write(name: string, text: string): string;
  path(name: string): string;
  read(name: string): string;
  there(): readonly string[];
  /** Puts everything back as it was. */
  lay(): void;
  remove(): void;
  /** `eidograph fit RIG --from` these captures. */
  fit(captures: string, options?: Partial<FitOptions>): { status: number; out: string; err: string };
}

export function fitDesk(): FitDesk {
  const files = scratch();
  const rig = files.path('bench.yaml');
  return {
    ...files,
    rig,
    read: (name) => readFileSync(files.path(name), 'utf8'),
    there: () => readdirSync(dirname(rig)).sort(),
    lay() {
      for (const name of readdirSync(files.path('.'))) rmSync(files.path(name), { recursive: true });
      files.write('bench.yaml', RIG);
      files.write('leader.yaml', LEADER);
      files.write('wren.yaml', WREN);
    },
    fit(captures, options = {}) {
      const out: string[] = [];
      const err: string[] = [];
      const at = files.write('captures.csv', captures);
      const status = fitFromCaptures(
        rig,
        {
          ...PLAIN,
          from: at,
          check: undefined,
          wish: { jitterM: 0.0005, lagS: 0.06 },
          ...options,
        },
        filesOnDisk(() => ({ date: '2026-12-01', time: '20-15-00' })),
        { out: (text) => out.push(text), err: (text) => err.push(text) },
      );
      return { status, out: out.join(''), err: err.join('') };
    },
  };
}
