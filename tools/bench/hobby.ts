import type { FollowerSpec } from '../../src/follower/spec.ts';
import { LEADER_POINTS, PERIOD_US, type Scene } from './scene.ts';
import type { Way } from './way.ts';

/**
 * (d) The script a hobbyist writes: lines split and turned into numbers, a fixed low-pass, a clamp, a share of the way
 * at most as far as the speed allows, and a template string for each follower. No states, no health, no acceleration
 * limit; its commands are its own.
 */
export function hobby(scene: Scene): Way {
  const robots = scene.plan.followers.map((spec) => ({ spec, angles: spec.joints.map((joint) => joint.restRad) }));
  const sent = robots.map(() => Buffer.alloc(0));
  let text = '';
  let smooth: number[] | null = null;
  let commands = 0;

  const onLine = (line: string): void => {
    const values = line.trim().split(',').map(Number);
    if (values.some((value) => Number.isNaN(value))) return;
    smooth = smooth === null ? values : smooth.map((old, j) => old + SMOOTHING * ((values[j] as number) - old));
    const leader = smooth.map((value) => mapRange(value, LOW_COUNTS, HIGH_COUNTS, LOW_RAD, HIGH_RAD));
    robots.forEach((robot, f) => {
      const targets = robot.spec.joints.map((joint) => wish(joint, leader));
      robot.angles = robot.angles.map((angle, j) =>
        approach(angle, targets[j] as number, robot.spec.joints[j]?.speedRadS ?? 0),
      );
      // Degrees with one decimal, as people read them.
      sent[f] = Buffer.from(`S${robot.angles.map((angle) => ((angle * 180) / Math.PI).toFixed(1)).join(',')}\n`);
      commands++;
    });
  };

  return {
    push(chunk) {
      text += decoder.decode(chunk);
      const lines = text.split('\n');
      text = lines.pop() ?? '';
      for (const line of lines) onLine(line);
    },
    sent: (f) => sent[f] as Uint8Array,
    commands: () => commands,
  };
}

const decoder = new TextDecoder();
const SMOOTHING = 0.2;
const [[LOW_COUNTS, LOW_RAD], , [HIGH_COUNTS, HIGH_RAD]] = LEADER_POINTS;

function mapRange(value: number, fromLow: number, fromHigh: number, toLow: number, toHigh: number): number {
  return toLow + ((value - fromLow) / (fromHigh - fromLow)) * (toHigh - toLow);
}

function wish(joint: FollowerSpec['joints'][number], leader: readonly number[]): number {
  const asked = (leader[joint.sources[0]?.joint ?? 0] ?? 0) * joint.gain + joint.offsetRad;
  return Math.min(Math.max(asked, joint.minRad), joint.maxRad);
}

function approach(angle: number, target: number, speedRadS: number): number {
  const most = (speedRadS * PERIOD_US) / 1e6;
  return angle + Math.min(Math.max(target - angle, -most), most);
}
