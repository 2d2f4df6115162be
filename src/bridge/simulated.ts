import { type Clock, US_PER_S } from '../clock/clock.ts';
import type { FollowerSpec } from '../follower/spec.ts';
import type { LeaderSpec } from '../leader/spec.ts';
import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';
import { simulatedBoard, type SimulatedBoard, type SimulatedBoardOptions } from '../sim/board.ts';

/** Time for a troupe to wake, servo by servo, and to join a hand that lies still: nobody starts in mid-motion. */
const STILL_US = 3 * US_PER_S;

/** A board behind a `sim:` address: a hand with the leader's travel, arms with the followers' servos, hanging at rest. */
export function simulatedFor(rig: CompiledRig, board: CompiledBoard, clock: Clock): SimulatedBoard {
  if (board.address.kind !== 'sim') throw new TypeError(`${board.address.text} is not simulated`);
  return simulatedBoard({
    clock,
    address: board.address,
    wire: board.wire,
    plan: board.plan,
    hand: board.leads ? handOf(rig.plan.leader) : null,
    arms: board.followers.map((f) => armOf(rig.plan.followers[f] as FollowerSpec)),
  });
}

function handOf(leader: LeaderSpec): NonNullable<SimulatedBoardOptions['hand']> {
  return {
    countsMin: leader.countsMin,
    countsMax: leader.countsMax,
    stillUs: STILL_US,
    inputs: [
      ...leader.joints.map((joint) => ({
        kind: 'joint' as const,
        travelMin: joint.travelMin,
        travelMax: joint.travelMax,
        restCounts: Math.min(Math.max(joint.map.inverse(0), joint.travelMin), joint.travelMax),
        countsPerRad: (joint.map.xMax - joint.map.xMin) / (joint.map.yMax - joint.map.yMin),
      })),
      ...leader.buttons.map((button) => ({
        kind: 'button' as const,
        // A theatre's pedal is held down through the demo: enable would otherwise keep every arm still.
        restCounts: (button.does === 'enable') === (button.pressed === 'below') ? leader.countsMin : leader.countsMax,
      })),
    ],
  };
}

function armOf(spec: FollowerSpec): SimulatedBoardOptions['arms'][number] {
  return {
    name: spec.name,
    servos: spec.servos.map(({ map, turns }) => {
      const rest = turns.reduce((sum, t) => sum + t.weight * (spec.joints[t.joint]?.restRad ?? 0), 0);
      return { map, turns, startRad: rest, sagRad: rest, holdsLostPulse: spec.onLostPulse === 'hold' };
    }),
  };
}
