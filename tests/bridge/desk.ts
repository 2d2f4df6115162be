import { type Board, board as makeBoard, type Word } from '../../src/bridge/board.ts';
import type { Stamped } from '../../src/bridge/source.ts';
import { type VirtualClock, virtualClock } from '../../src/clock/virtual.ts';
import { drive as makeDrive } from '../../src/drive/drive.ts';
import type { FollowerStage } from '../../src/drive/follower-stage.ts';
import type { Port, PortListener } from '../../src/port/types.ts';
import type { CompiledBoard } from '../../src/rig/compiled.ts';
import type { LinesOptions } from '../../src/wire/lines-options.ts';
import { followerSpec, planOf } from '../plans.ts';

const LINES: LinesOptions = {
  separator: null,
  sends: 'always',
  checksum: null,
  template: 'W{joint0.us},{joint1.us}\n',
  limp: 'limp\n',
  powerOn: null,
  powerOff: null,
};

const INPUTS = { channels: [0, 1], names: ['joint0', 'joint1'], samplingMs: 10 };
export const output = (follower: string): CompiledBoard['plan']['outputs'][number] => ({
  follower,
  joints: ['joint0', 'joint1'],
  servos: [0, 1].map((channel) => ({ channel, minUs: 560, maxUs: 2440, joint: `joint${channel}` })),
  power: null,
});

/** A board that carries the leader and two followers, all in `lines`. */
export const BOTH_ENDS: CompiledBoard = {
  address: { kind: 'sim', text: 'sim:arm?name=wren', what: 'arm', options: new Map() },
  wire: { name: 'lines', lines: LINES },
  plan: { boardName: null, inputs: INPUTS, outputs: [output('wren'), output('heron')] },
  leads: true,
  followers: [1, 2],
};
export const FOLLOWERS_ONLY: CompiledBoard = { ...BOTH_ENDS, leads: false, plan: { ...BOTH_ENDS.plan, inputs: null } };

/** A board on a port that does only what a test has it do. */
export class Desk {
  readonly clock: VirtualClock = virtualClock(1_000_000);
  readonly written: string[] = [];
  readonly events: Stamped[] = [];
  readonly words: Word[] = [];
  readonly board: Board;
  /** Takes what is written and is busy with it until `idle`. */
  readonly #way = { canTake: true };
  #listener: PortListener | null = null;
  readonly #stages: readonly FollowerStage[];

  constructor(plan: CompiledBoard) {
    const [way, written] = [this.#way, this.written];
    const port: Port = {
      address: plan.address.text,
      start: (listener) => void (this.#listener = listener),
      get canTake() {
        return way.canTake;
      },
      write(bytes) {
        if (!way.canTake) return false;
        way.canTake = false;
        written.push(Buffer.from(bytes).toString('latin1'));
        return true;
      },
      close: () => Promise.resolve(),
    };
    this.board = makeBoard(plan, port, this.clock, {
      event: (event) => this.events.push({ ...event }),
      say: (word) => this.words.push(word),
    });
    const spec = followerSpec();
    const starts = [0, 1, 2].map(() => ({ poseRad: null, unasked: true, awake: true, board: 0 }));
    this.#stages = makeDrive(planOf([spec, spec, spec]), starts, 0).followers;
  }

  get port(): PortListener {
    if (this.#listener === null) throw new Error('not started');
    return this.#listener;
  }

  opens(): this {
    this.#way.canTake = true;
    this.port.opened();
    return this;
  }

  hears(text: string): this {
    this.port.data(new TextEncoder().encode(text));
    return this;
  }

  idles(): this {
    this.#way.canTake = true;
    this.port.idle();
    return this;
  }

  closes(code: 'PORT_CLOSED' | 'PORT_BUSY' | 'PORT_MISSING'): this {
    this.#way.canTake = false;
    this.port.closed({ code, address: 'sim:arm?name=wren', detail: '' }, 100);
    return this;
  }

  passes(us: number): this {
    this.clock.runTo(this.clock.nowUs() + us);
    return this;
  }

  sends(place: number): this {
    this.board.send(place, this.#stages[1 + place] as FollowerStage);
    return this;
  }

  /** Events since the last look, as `kind follower`. */
  told(): string[] {
    const told = this.events.map((event) => ('follower' in event ? `${event.kind} ${event.follower}` : event.kind));
    this.events.length = 0;
    return told;
  }

  said(): string[] {
    const said = this.words.map((word) => word.kind);
    this.words.length = 0;
    return said;
  }
}
