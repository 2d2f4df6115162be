import { type Cancel, type Clock, US_PER_MS, US_PER_S } from '../clock/clock.ts';
import { LEADER } from '../drive/events.ts';
import type { FollowerStage } from '../drive/follower-stage.ts';
import type { Port, PortFault } from '../port/types.ts';
import type { CompiledBoard } from '../rig/compiled.ts';
import { openSession } from '../wire/session.ts';
import type { Emit, Garble, WireEvent } from '../wire/types.ts';
import type { Stamped } from './source.ts';
import { stamps } from './stamps.ts';

/** One open port with the wire spoken on it: turns bytes into events and commands into bytes. */
export interface Board {
  readonly address: string;
  readonly is: Readonly<BoardStanding>;
  /** Writes the command of the follower at `output` of this board. */
  send(output: number, command: FollowerStage): void;
  close(): Promise<void>;
}

export interface BoardStanding {
  open: boolean;
  /** It has greeted: readings come, commands may go. */
  ready: boolean;
  /** What it calls itself; null: nothing yet. */
  name: string | null;
  /** Why it is not open; null: it is, or was never tried. */
  fault: PortFault | null;
  readings: number;
  commands: number;
  /** Messages thrown away as damaged. */
  garbled: number;
  /** Frames the board sent that never came. */
  lost: number;
  /** Times the board has restarted while in use. */
  reboots: number;
}

/** Something to tell the operator; `bridge/words` makes the sentence. */
export type Word =
  | { readonly kind: 'opening_failed' | 'lost_port'; readonly fault: PortFault; readonly retryMs: number }
  | { readonly kind: 'opened' | 'waiting' | 'rebooted'; readonly address: string }
  | { readonly kind: 'greeted'; readonly address: string; readonly board: string | null }
  | { readonly kind: 'stranger'; readonly address: string; readonly board: string; readonly wanted: string }
  | { readonly kind: 'lacks'; readonly address: string; readonly what: 'input' | 'output'; readonly channel: number }
  | { readonly kind: 'garbled'; readonly address: string; readonly why: Garble; readonly total: number };

export interface BoardListener {
  event(event: Stamped): void;
  say(word: Word): void;
}

/** Boards that reset when their port opens take up to about two seconds to speak (optiboot waits one; measured 1.9 s). */
const FIRST_NUDGE_US = 2.5 * US_PER_S;
const NUDGE_US = US_PER_S;
/** Damaged messages are counted always and told at most this often. */
const TELL_GARBLED_US = 5 * US_PER_S;
/** The wire's own questions that wait while a write is in flight; more would mean a wire that talks without end. */
const QUESTIONS_MAX = 64;
/** Silence after opening that is worth a word. */
const TELL_WAITING_US = 300 * US_PER_MS;

export function board(plan: CompiledBoard, port: Port, clock: Clock, listener: BoardListener): Board {
  const session = openSession(plan.wire, plan.plan);
  const address = plan.address.text;
  // One follower stands for all on the board. The leader's part comes last: with the port gone, nobody may answer to it.
  const outputs = plan.followers.slice(0, 1);
  const parts = plan.leads ? [...outputs, LEADER] : outputs;
  const questions: Uint8Array[] = [];
  const readings = stamps(plan.plan.inputs?.channels.length ?? 0, listener.event);
  const buffers = plan.followers.map((_, output) => new Uint8Array(session.frameBytesMax(output)));
  // A view for each length a command has had: made once, or each command would allocate one.
  const views = buffers.map((): Uint8Array[] => []);
  const is: BoardStanding = {
    open: false,
    ready: false,
    name: null,
    fault: null,
    readings: 0,
    commands: 0,
    garbled: 0,
    lost: 0,
    reboots: 0,
  };
  let cancelNudge: Cancel = () => {};
  let cancelWaiting: Cancel = () => {};
  let toldGarbledUs = Number.NEGATIVE_INFINITY;

  const tell = (kind: 'ready' | 'down' | 'reboot' | 'blocked' | 'free', to: readonly number[], kept = false): void => {
    const tUs = clock.nowUs();
    for (const follower of to) listener.event({ kind, tUs, follower, kept });
  };

  const tellIfBusy = (): void => {
    if (!port.canTake) tell('blocked', outputs);
  };

  const nudgeAt = (afterUs: number): void => {
    cancelNudge();
    cancelNudge = clock.at(clock.nowUs() + afterUs, () => {
      session.nudge(hear);
      if (!is.ready) nudgeAt(NUDGE_US);
    });
  };

  const ask = (bytes: Uint8Array): void => {
    if (questions.length === 0 && port.write(bytes)) return;
    if (questions.length < QUESTIONS_MAX) questions.push(Uint8Array.from(bytes));
  };

  const hear: Emit = (event: WireEvent): void => {
    switch (event.kind) {
      case 'reading':
        is.readings++;
        readings.add(clock.nowUs(), event.counts, event.boardUs);
        return;
      case 'ready':
        cancelNudge();
        cancelWaiting();
        is.ready = true;
        is.name = event.board;
        listener.say({ kind: 'greeted', address, board: event.board });
        // The last word of the greeting may still be leaving: nobody may write over it.
        tellIfBusy();
        tell('ready', parts, event.kept === true);
        return;
      case 'reboot':
        is.ready = false;
        is.reboots++;
        nudgeAt(FIRST_NUDGE_US);
        listener.say({ kind: 'rebooted', address });
        tell('reboot', parts);
        return;
      case 'stranger':
        // It has answered: there is nothing to wait or ask for. And nobody may go on to move it.
        cancelNudge();
        cancelWaiting();
        if (is.ready) tell('reboot', parts);
        is.ready = false;
        listener.say({ kind: 'stranger', address, board: event.board, wanted: plan.plan.boardName ?? '' });
        return;
      case 'send':
        ask(event.bytes);
        return;
      case 'garbled':
        is.garbled++;
        if (clock.nowUs() - toldGarbledUs < TELL_GARBLED_US) return;
        toldGarbledUs = clock.nowUs();
        listener.say({ kind: 'garbled', address, why: event.why, total: is.garbled });
        return;
      case 'lost':
        is.lost += event.frames;
        return;
      case 'lacks':
        listener.say({ kind: 'lacks', address, what: event.what, channel: event.channel });
        return;
      case 'echo':
        return;
    }
  };

  port.start({
    opened() {
      is.open = true;
      is.fault = null;
      listener.say({ kind: 'opened', address });
      nudgeAt(FIRST_NUDGE_US);
      cancelWaiting = clock.at(clock.nowUs() + TELL_WAITING_US, () => listener.say({ kind: 'waiting', address }));
      session.open(hear);
    },
    data(bytes) {
      session.push(bytes, hear);
      readings.flush(clock.nowUs());
    },
    idle() {
      const next = questions[0];
      if (next !== undefined) {
        if (port.write(next)) questions.shift();
        return;
      }
      if (is.ready) tell('free', outputs);
    },
    closed(fault, retryMs) {
      const wasReady = is.ready;
      const wasOpen = is.open;
      cancelNudge();
      cancelWaiting();
      questions.length = 0;
      is.open = false;
      is.ready = false;
      if (wasOpen || is.fault?.code !== fault.code)
        listener.say({ kind: wasOpen ? 'lost_port' : 'opening_failed', fault, retryMs });
      is.fault = fault;
      if (wasReady) tell('down', parts);
    },
  });

  const encode = (output: number, command: FollowerStage, out: Uint8Array): number => {
    switch (command.kind) {
      case 'move':
        return session.encode(output, command.arm.frame, out);
      case 'limp':
        return session.limp(output, out);
      case 'power_on':
        return session.power(output, true, out);
      case 'power_off':
        return session.power(output, false, out);
    }
  };

  return {
    address,
    is,
    send(output, command) {
      const out = buffers[output] as Uint8Array;
      const length = encode(output, command, out);
      if (length === 0) return;
      const cached = views[output] as Uint8Array[];
      const view = (cached[length] ??= out.subarray(0, length));
      is.commands++;
      port.write(view);
      tellIfBusy();
    },
    async close() {
      cancelNudge();
      cancelWaiting();
      await port.close();
    },
  };
}
