import { buttons, type Buttons } from './buttons.ts';
import { despike } from './despike.ts';
import { potHealth, type PotHealth } from './health.ts';
import { notices, type Notices } from './notices.ts';
import { oneEuro } from './one-euro.ts';
import type { LeaderSpec } from './spec.ts';

/** The leader kernel: raw counts in, a conditioned pose out. All arrays are reused. */
export interface Leader {
  readonly spec: LeaderSpec;
  /** Angle of each joint, radians; a sick or suspect joint keeps its last sound angle, NaN before there is one. */
  readonly poseRad: Float64Array;
  readonly health: PotHealth;
  readonly buttons: Buttons;
  readonly notices: Notices;
  /** Counts of each joint as last read, for show. */
  readonly countsNow: Float64Array;
  /** @param counts parallel to the board's inputs, NaN where this reading has no value */
  take(tUs: number, counts: Float64Array): void;
}

export function leader(spec: LeaderSpec): Leader {
  const joints = spec.joints;
  const n = joints.length;
  const poseRad = new Float64Array(n).fill(Number.NaN);
  const countsNow = new Float64Array(n).fill(Number.NaN);
  const read = new Float64Array(n);
  const clean = new Float64Array(n);
  // In an array, or handing it on for each joint would box it anew.
  const nowUs = new Float64Array(1);
  const angle = new Float64Array(n);
  const pressed = new Float64Array(spec.buttons.length);
  const median = despike(joints.map((j) => j.despike));
  const smooth = oneEuro(joints.map((j) => j.smooth));
  const health = potHealth(spec);
  const pads = buttons(spec.buttons, spec.countsMax - spec.countsMin);
  const notice = notices(spec);
  return {
    spec,
    poseRad,
    health,
    buttons: pads,
    notices: notice,
    countsNow,
    take(tUs, counts) {
      nowUs[0] = tUs;
      for (let j = 0; j < n; j++) {
        const joint = joints[j] as (typeof joints)[number];
        const raw = counts[joint.input] as number;
        const came = !Number.isNaN(raw);
        read[j] = raw;
        clean[j] = raw;
        if (came) {
          countsNow[j] = raw;
          median.push(j, read, clean);
          joint.map.apply(clean, j, angle, j);
        }
        health.judge(j, nowUs, clean, angle);
        // A reading that leaves the joint out says nothing against it.
        if (!came) continue;
        // What a suspect pot says must neither move an arm nor stay in the filter's memory.
        if (health.suspect[j] === 1) smooth.reset(j);
        else if (health.state[j] === 0) smooth.push(j, nowUs, angle, poseRad);
      }
      for (let b = 0; b < pressed.length; b++)
        pressed[b] = counts[(spec.buttons[b] as (typeof spec.buttons)[number]).input] as number;
      pads.push(pressed);
      notice.push(tUs, read);
    },
  };
}
