import type { Word } from '../../src/bridge/board.ts';
import { type Live, live, type LiveOptions } from '../../src/bridge/live.ts';
import { simulatedFor } from '../../src/bridge/simulated.ts';
import { type VirtualClock, virtualClock } from '../../src/clock/virtual.ts';
import type { DriveEvent } from '../../src/drive/events.ts';
import type { State } from '../../src/follower/states.ts';
import type { Port } from '../../src/port/types.ts';
import type { CompiledBoard, CompiledRig } from '../../src/rig/compiled.ts';
import { loadRig } from '../../src/rig/load.ts';
import type { SimulatedBoard } from '../../src/sim/board.ts';

/** Compiles a rig written in a test. */
export function rigOf(yaml: string): CompiledRig {
  const file = '/rig.yaml';
  const loaded = loadRig(file, (asked) =>
    asked === file ? { text: yaml } : { fault: 'missing', detail: 'a test has one file' },
  );
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes, null, 1));
  return loaded.rig;
}

/** A follower of two joints at 50 Hz, as a list entry of a rig. */
function followerYaml(name: string, port: string, extra = ''): string {
  return `
  - follower: ${name}
    port: ${port}
    wire: frames
    rate_hz: 50
    wake: rest
    on_lost_pulse: limp
    joints:
      - { name: base, from: base, range_deg: [-90, 90], speed_deg_s: 60, accel_deg_s2: 240, rest_deg: 0, servo: { channel: CH0, points: [[-90, 560], [90, 2440]] } }
      - { name: elbow, from: elbow, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, rest_deg: 0, servo: { channel: CH1, points: [[-90, 560], [90, 2440]] } }
${extra}`;
}

/** A rig of one hand and some followers, each entry `[name, port, more lines]`. */
export function rigYaml(followers: readonly (readonly [string, string, string?])[], head = ''): string {
  const used = new Map<string, number>();
  const entries = followers.map(([name, port, extra]) => {
    const first = used.get(port) ?? 3;
    used.set(port, first + 2);
    return followerYaml(name, port, extra)
      .replace('CH0', `${first}`)
      .replace('CH1', `${first + 1}`);
  });
  return `
rig: rehearsal
${head}
leader:
  leader: handstick
  port: sim:hand?seed=7
  wire: frames
  counts: [0, 4095]
  timeout_ms: 250
  joints:
    - { name: base, channel: 0, points: [[400, -120], [3700, 120]] }
    - { name: elbow, channel: 1, points: [[400, -120], [3700, 120]], smooth: { cutoff_hz: 2, beta_hz_per_deg_s: 0.08 } }
followers:${entries.join('')}`;
}

export interface PerformanceOptions extends Partial<LiveOptions> {
  /** Speed of every board's line; none when absent. */
  readonly baud?: number;
  readonly latenessUs?: () => number;
  /** Another board than the simulated one; null: that one. */
  readonly boardFor?: (plan: CompiledBoard, clock: VirtualClock) => SimulatedBoard | null;
}

/** A live run on a virtual clock with simulated boards, and everything it said. */
export class Performance {
  readonly clock: VirtualClock;
  readonly live: Live;
  /** By address. */
  readonly boards = new Map<string, SimulatedBoard>();
  readonly words: Word[] = [];
  readonly bugs: unknown[] = [];
  /** Every event as delivered, copied. */
  readonly events: DriveEvent[] = [];
  /** Writes that a port refused, because it was busy. */
  refused = 0;

  constructor(rig: CompiledRig, options: PerformanceOptions = {}) {
    this.clock = virtualClock(1_000_000, options.latenessUs);
    this.live = live({
      rig,
      clock: this.clock,
      openPort: (plan) => {
        const board = options.boardFor?.(plan, this.clock) ?? simulatedFor(rig, plan, this.clock);
        if (options.baud !== undefined) board.far.setBaud(options.baud);
        this.boards.set(plan.address.text, board);
        return this.#watched(board.port);
      },
      memory: null,
      unasked: true,
      dry: false,
      say: (word) => this.words.push(word),
      onBug: (_, bug) => this.bugs.push(bug),
      ...options,
    });
    this.live.events$.subscribe((event) =>
      this.events.push(event.kind === 'reading' ? { ...event, counts: event.counts.slice() } : { ...event }),
    );
  }

  run(forUs: number): this {
    this.clock.runTo(this.clock.nowUs() + forUs);
    return this;
  }

  board(address: string): SimulatedBoard {
    const found = this.boards.get(address);
    if (found === undefined) throw new Error(`no board at ${address}`);
    return found;
  }

  states(): State[] {
    return this.live.drive.followers.map((f) => f.is.state);
  }

  #watched(port: Port): Port {
    const write = (bytes: Uint8Array): boolean => {
      const taken = port.write(bytes);
      if (!taken) this.refused++;
      return taken;
    };
    return {
      address: port.address,
      start: (listener) => port.start(listener),
      get canTake() {
        return port.canTake;
      },
      write,
      close: () => port.close(),
    };
  }
}
