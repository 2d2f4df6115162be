import { drive as makeDrive } from '../drive/drive.ts';
import type { FollowerStage, Start } from '../drive/follower-stage.ts';
import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';
import { openSession } from '../wire/session.ts';
import { pipeline } from './pipeline.ts';
import { eventSource, type Stamped } from './source.ts';

/** Told of each command, in order; everything the stage holds is that command's until the call returns. */
export type OnCommand = (command: FollowerStage, tUs: number) => void;

/** How a trace is pushed through: readings in, commands out, on no clock but the readings' own stamps. */
export interface Trace {
  push(event: Stamped): void;
  /** Goes on to `untilUs` although nothing comes: a long pause between two readings need not be taken at one go. */
  runTo(untilUs: number): void;
  /** No more readings: the arms go on until contact is lost, as they would live, and brake to a stand. */
  end(): void;
}

/** After the last reading the arms have this long to come to a stand; any sane limits need less. */
const TAIL_US = 60_000_000;

/**
 * The live path without ports: the same drive, the same pipeline, the same wires for rounding.
 * @param from where each follower starts, radians in joint order; null: at rest
 * @param startUs stamp of the first reading: ports are ready and arms join then
 */
export function trace(
  rig: CompiledRig,
  from: readonly (Float64Array | null)[],
  startUs: number,
  onCommand: OnCommand,
): Trace {
  const starts = rig.plan.followers.map(
    (_, f): Start => ({ poseRad: from[f] ?? null, unasked: true, awake: true, board: boardOf(rig, f) }),
  );
  const drive = makeDrive(rig.plan, starts, startUs);
  const source = eventSource(drive, null, startUs);
  const sessions = rig.boards.map((b) => openSession(b.wire, b.plan));
  const scratch = rig.boards.map((b, i) =>
    b.followers.map((_, o) => new Uint8Array(sessions[i]?.frameBytesMax(o) ?? 0)),
  );

  const send = (command: FollowerStage): void => {
    const on = command.board;
    const output = (rig.boards[on] as CompiledBoard).followers.indexOf(command.index);
    if (command.kind === 'move') sessions[on]?.encode(output, command.arm.frame, scratch[on]?.[output] as Uint8Array);
    onCommand(command, drive.common.nowUs[0] as number);
  };
  const bugs: unknown[] = [];
  pipeline(source.events$, drive, send, (_, bug) => bugs.push(bug));
  const orThrow = (): void => {
    if (bugs.length > 0) throw bugs[0];
  };

  const unfinished = (): boolean =>
    drive.followers.some((f) => f.is.moving) || (!drive.leader.stale && Number.isFinite(drive.plan.leader.timeoutUs));

  return {
    push(event) {
      source.push(event);
      orThrow();
    },
    runTo(untilUs) {
      source.runTo(untilUs);
      orThrow();
    },
    end() {
      const limitUs = (drive.common.nowUs[0] as number) + TAIL_US;
      while (unfinished() && drive.dueUs() <= limitUs) source.runTo(drive.dueUs());
      source.close();
      orThrow();
    },
  };
}

function boardOf(rig: CompiledRig, follower: number): number {
  return rig.boards.findIndex((b) => b.followers.includes(follower));
}
