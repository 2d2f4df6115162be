import type { Observable } from 'rxjs';
import { type Clock, US_PER_MS } from '../clock/clock.ts';
import { drive as makeDrive, type Drive } from '../drive/drive.ts';
import { ALL, type DriveEvent, type Key } from '../drive/events.ts';
import type { FollowerStage, Start } from '../drive/follower-stage.ts';
import { driveStatus, type DriveStatus } from '../drive/status.ts';
import type { Port, PortFaultCode } from '../port/types.ts';
import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';
import { board as makeBoard, type Board, type Word } from './board.ts';
import { pipeline } from './pipeline.ts';
import { eventSource, type Stamped } from './source.ts';
import type { WakeMemory } from './wake-memory.ts';

export interface LiveOptions {
  readonly rig: CompiledRig;
  readonly clock: Clock;
  /** Makes the port of a board: a real one, or a simulated board's. */
  readonly openPort: (board: CompiledBoard) => Port;
  /** null: every arm wakes at rest. */
  readonly memory: WakeMemory | null;
  /** Let arms start without the operator's go. */
  readonly unasked: boolean;
  /** Compute everything and send nothing: only the leader's port is opened. */
  readonly dry: boolean;
  readonly say: (word: Word) => void;
  /** A bug of ours: that follower is given up, the others go on. */
  readonly onBug: (follower: string, bug: unknown) => void;
  /** Called before the first event, for those who have to see every one; subscribers see each after it was handled. */
  readonly onStart?: (drive: Drive, events$: Observable<DriveEvent>, clock: Clock) => void;
}

/** A rig being driven. */
export interface Live {
  readonly drive: Drive;
  readonly boards: readonly Board[];
  /** Every event as delivered, ticks included, and the commands they made. */
  readonly events$: Observable<DriveEvent>;
  /** @param value only for `pace`: share of the speed limits, 0 to 1 */
  key(key: Key, follower?: number, value?: number): void;
  /** Delivers what no board says: a take that leads. */
  push(event: Stamped): void;
  /** Moves one servo by pulse, to measure it; NaN microseconds bring it home. See `JogEvent`. */
  jog(follower: number, servo: number, pulseUs: number): void;
  status(): LiveStatus;
  /** Resolves true as soon as no arm is moving, false after `limitUs`. */
  still(limitUs: number): Promise<boolean>;
  close(): Promise<void>;
}

export interface LiveStatus extends DriveStatus {
  readonly boards: readonly BoardStatus[];
}

export interface BoardStatus {
  readonly port: string;
  readonly followers: readonly string[];
  readonly leads: boolean;
  readonly open: boolean;
  readonly ready: boolean;
  readonly board: string | null;
  readonly fault: PortFaultCode | null;
  readonly readings: number;
  readonly commands: number;
  readonly garbled: number;
  readonly lost: number;
  readonly reboots: number;
}

const LOOK_US = 20 * US_PER_MS;

export function live(options: LiveOptions): Live {
  const { rig, clock, dry } = options;
  const starts = rig.plan.followers.map((spec, f): Start => {
    const pose = spec.wake === 'rest' ? null : (options.memory?.recall(spec) ?? null);
    const on = rig.boards.findIndex((b) => b.followers.includes(f));
    return { poseRad: pose, unasked: options.unasked, awake: dry, board: on };
  });
  const drive = makeDrive(rig.plan, starts, clock.nowUs());
  const source = eventSource(drive, clock, clock.nowUs());

  const opened = rig.boards.filter((plan) => !dry || plan.leads);
  const boards: Board[] = [];
  const ways = rig.plan.followers.map((_, f) => {
    const on = rig.boards.findIndex((b) => b.followers.includes(f));
    return { on, output: (rig.boards[on] as CompiledBoard).followers.indexOf(f) };
  });
  const send = (command: FollowerStage): void => {
    const way = ways[command.index] as (typeof ways)[number];
    if (!dry) boards[way.on]?.send(way.output, command);
  };
  const flow = pipeline(source.events$, drive, send, (follower, bug) => options.onBug(follower.spec.name, bug));
  options.onStart?.(drive, source.events$, clock);
  for (const plan of opened) {
    const listener = { event: source.push, say: options.say };
    boards.push(makeBoard(plan, options.openPort(plan), clock, listener));
  }
  // A drive that starts awake has something due before anything arrives.
  source.runTo(clock.nowUs());
  const remembering = dry ? null : options.memory?.watch(drive, clock);

  return {
    drive,
    boards,
    events$: source.events$,
    key(key, follower = ALL, value = 0) {
      source.push({ kind: 'key', tUs: clock.nowUs(), key, follower, value });
    },
    push: source.push,
    jog(follower, servo, pulseUs) {
      source.push({ kind: 'jog', tUs: clock.nowUs(), follower, servo, pulseUs });
    },
    status: () => ({
      ...driveStatus(drive, clock.nowUs()),
      boards: boards.map((b, i) => boardStatus(b, opened[i], rig)),
    }),
    still(limitUs) {
      const untilUs = clock.nowUs() + limitUs;
      return new Promise((resolve) => {
        const look = (): void => {
          const moving = drive.followers.some((f) => f.is.present && f.is.moving);
          if (!moving || clock.nowUs() >= untilUs) resolve(!moving);
          else clock.at(clock.nowUs() + LOOK_US, look);
        };
        look();
      });
    },
    async close() {
      remembering?.stop();
      flow.unsubscribe();
      source.close();
      await Promise.all(boards.map((b) => b.close()));
    },
  };
}

function boardStatus(board: Board, plan: CompiledBoard | undefined, rig: CompiledRig): BoardStatus {
  const { open, ready, name, fault, readings, commands, garbled, lost, reboots } = board.is;
  return {
    port: board.address,
    followers: (plan?.followers ?? []).map((f) => rig.plan.followers[f]?.name ?? ''),
    leads: plan?.leads ?? false,
    open,
    ready,
    board: name,
    fault: fault?.code ?? null,
    readings,
    commands,
    garbled,
    lost,
    reboots,
  };
}
