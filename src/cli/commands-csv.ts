import type { OnCommand } from '../bridge/trace.ts';
import { US_PER_MS } from '../clock/clock.ts';
import type { CompiledRig } from '../rig/compiled.ts';

/** Commands as rows of CSV: one for each joint of each command that moves. */
export interface CommandsCsv {
  readonly take: OnCommand;
  /** The rows since the last call; the header stands before the first. */
  rows(): string;
  /** Characters that wait to be taken. */
  readonly length: number;
}

const HEADER = 't_ms,follower,state,joint,target_deg,angle_deg,pulse_us\n';
const DEG = 180 / Math.PI;

export function commandsCsv(rig: CompiledRig): CommandsCsv {
  // The first servo that a joint turns; a joint without one has no pulse to show.
  const servos = rig.plan.followers.map(({ joints, servos: all }) =>
    joints.map((_, j) => all.findIndex(({ turns }) => turns.some(({ joint }) => joint === j))),
  );
  let text = HEADER;
  return {
    take({ kind, spec, index, is, arm }, tUs) {
      // Pulses and power are switched for a whole arm: there is no joint to give a row.
      if (kind !== 'move') return;
      const start = `${tUs / US_PER_MS},${spec.name},${is.state},`;
      for (let j = 0; j < spec.joints.length; j++) {
        const target = (arm.targetRad[j] as number) * DEG;
        const angle = (arm.governor.x[j] as number) * DEG;
        const pulse = arm.frame.sentUs[servos[index]?.[j] ?? -1] ?? '';
        // A number joined to text is in its shortest form that reads back as the same number (ECMA-262, Number::toString).
        text += `${start}${spec.joints[j]?.name},${target},${angle},${pulse}\n`;
      }
    },
    rows() {
      const taken = text;
      text = '';
      return taken;
    },
    get length() {
      return text.length;
    },
  };
}
