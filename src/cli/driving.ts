import type { Word } from '../bridge/board.ts';
import { live as makeLive, type Live } from '../bridge/live.ts';
import { type LogLevel, logDestination, openLog } from '../bridge/log.ts';
import type { WakeMemory } from '../bridge/wake-memory.ts';
import { CAUTIONS, ENDINGS, leftHolding, notParked, sentences, type Sentence } from '../bridge/words.ts';
import { type Cancel, US_PER_MS, US_PER_S } from '../clock/clock.ts';
import type { Port } from '../port/types.ts';
import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';
import { watchStates } from './changes.ts';
import type { Display, Ending, Look } from './display.ts';
import { jsonLines } from './json-lines.ts';
import { keyReader } from './keys.ts';
import { type Operator, operator as makeOperator, PROMPTS } from './operator.ts';
import { parking, type ParkingOutcome } from './parking.ts';
import { plainLines } from './plain-lines.ts';
import { rates as makeRates } from './rates.ts';
import { reasons } from './view/follower-block.ts';
import { type LiveView, liveView } from './view/live-view.ts';
import type { WakesAt } from './view/scene.ts';
import { warm } from './warm.ts';
import type { World } from './world.ts';

export interface DrivingOptions {
  readonly rig: CompiledRig;
  readonly openPort: (board: CompiledBoard) => Port;
  /** @param onFault told when the memory cannot be written */
  readonly memory: (onFault: (detail: string) => void) => WakeMemory | null;
  /** Let arms start without the operator's go. */
  readonly unasked: boolean;
  readonly dry: boolean;
  /** Real arms may move: what has to be known is said, and leaving asks. */
  readonly real: boolean;
  /** How long, microseconds; null: until somebody ends it. */
  readonly forUs: number | null;
  readonly json: boolean;
  readonly logLevel: LogLevel;
  /** null: standard error, or the view's own lines. */
  readonly logFile: string | null;
}

const LOOK_US = 100 * US_PER_MS;
/** What a brake inside the limits may take, before the program leaves all the same. */
const STILL_US = US_PER_S;
const FLUSH_US = 500 * US_PER_MS;

/** Drives a rig until somebody or something ends it; resolves with the exit status. */
export async function driving(options: DrivingOptions, world: World): Promise<number> {
  const { rig, dry, real } = options;
  const { clock, out, err } = world;
  warm(rig);
  if (real && !dry) err.write(`${CAUTIONS.join('\n')}\n`);

  const startUs = clock.nowUs();
  const atUs = (): number => clock.nowUs() - startUs;
  const speak = sentences(rig);
  const say = (sentence: Sentence): void => display.say(sentence, atUs());
  const memory = options.memory((detail) => say({ text: `the wake pose cannot be kept: ${detail}`, weight: 'care' }));
  const view = viewFor(options, world, memory);
  const display: Display = view ?? (options.json ? jsonLines(out, err) : plainLines(out, err));
  const toLines = { write: (line: string) => say({ text: messageOf(line), weight: 'care' }) };
  const onScreen = view !== null && options.logFile === null;
  const log = openLog({
    level: options.logLevel,
    clock,
    to: onScreen ? toLines : logDestination(options.logFile),
  });

  const hear = (word: Word): void => {
    const sentence = speak(word);
    say(sentence);
    if (!onScreen) log.info(word, sentence.text);
  };
  const live = makeLive({
    rig,
    clock,
    openPort: options.openPort,
    memory,
    unasked: options.unasked,
    dry,
    say: hear,
    onBug: (follower, bug) => log.error({ follower, err: bug }, `${follower} is given up: ${String(bug)}`),
  });

  const over = ending();
  const hand = makeOperator(rig.plan.followers.length, {
    key: (key, follower, value) => live.key(key, follower, value),
    pace: () => live.drive.common.pace[0] as number,
    awake: () => real && !dry && live.drive.followers.some(({ is }) => is.present && is.pulsed),
    leave: over.because,
  });
  const rates = makeRates(rig.plan.followers.length);
  const lookNow = (): Look => {
    const status = live.status();
    return { atUs: atUs(), status, perSecond: rates.perSecond, operator: hand.is };
  };

  const cancelStates = watchStates(live, (f, from, to) => {
    const { followers, boards } = live.status();
    const status = followers[f] as (typeof followers)[number];
    const port = boards.find((board) => board.followers.includes(status.follower)) ?? null;
    display.changed({ atUs: atUs(), follower: status.follower, from, to, reasons: reasons(status, port) });
  });
  let afterwards = '';
  const cancelWorld = world.listen({
    signal(name) {
      if (name !== 'SIGINT') over.because('terminated');
      else interruptFromOutside(hand, say);
      view?.redraw();
    },
    outClosed: (fault) => over.because(fault.code === 'EPIPE' ? 'terminated' : 'broken'),
    bug(fault) {
      // On the screen it would be gone with the screen.
      if (onScreen) afterwards = `a fault of this program: ${fault instanceof Error ? fault.stack : String(fault)}\n`;
      else log.fatal({ err: fault }, `a fault of this program: ${String(fault)}`);
      over.because('broken');
    },
  });
  if (view !== null) openKeyboard(world, view, hand, rig.plan.followers.length, over.because);

  let outcome: (() => ParkingOutcome) | null = null;
  const lookOver = (): void => {
    const look = lookNow();
    rates.push(look.status);
    display.look(look);
    outcome = hand.is.asked === 'parking' ? (outcome ?? parking(live.drive, clock)) : null;
    const found = outcome?.() ?? 'under way';
    if (found === 'parked') over.because('parked');
    else if (found !== 'under way') {
      say({ text: notParked(found.not), weight: 'care' });
      over.because('unparked');
    }
    cancelLook = clock.at(clock.nowUs() + LOOK_US, lookOver);
  };
  let cancelLook: Cancel = clock.at(clock.nowUs(), lookOver);
  const cancelFor =
    options.forUs === null
      ? null
      : clock.at(startUs + options.forUs, () => (real ? hand.parkAndLeave() : over.because('over')));

  const why = await over.reason;
  cancelFor?.();
  const still = await comeToStand(live, why, over.hurried);
  const last = lookNow();
  cancelLook();
  cancelStates();
  await live.close();
  await display.end(last, why);
  if (view !== null) err.write(`${afterwards}${rig.name}: ${ENDINGS[why]}\n`);
  const holding = live.drive.followers.filter(({ is }) => is.pulsed).map(({ spec }) => spec.name);
  if (real && !dry && holding.length > 0) err.write(`${leftHolding(holding, still)}\n`);
  await Promise.all([out.flush(FLUSH_US), err.flush(FLUSH_US)]);
  cancelWorld();
  return exitStatus(why, still);
}

/** The first reason to end counts; a second one makes it hurry. */
function ending(): {
  readonly reason: Promise<Ending>;
  readonly hurried: Promise<void>;
  because(why: Ending): void;
} {
  let first: (why: Ending) => void = () => {};
  let second: () => void = () => {};
  let asked = false;
  const reason = new Promise<Ending>((resolve) => {
    first = resolve;
  });
  const hurried = new Promise<void>((resolve) => {
    second = resolve;
  });
  return {
    reason,
    hurried,
    because(why) {
      if (asked) second();
      else first(why);
      asked = true;
    },
  };
}

async function comeToStand(live: Live, why: Ending, hurried: Promise<void>): Promise<boolean> {
  // Simulated arms may be left as they are.
  if (why === 'over') return true;
  if (why !== 'parked') live.key('hold');
  return Promise.race([live.still(STILL_US), hurried.then(() => false)]);
}

function exitStatus(why: Ending, still: boolean): number {
  if (why === 'interrupted') return 130;
  return why === 'unparked' || why === 'broken' || !still ? 1 : 0;
}

function viewFor(options: DrivingOptions, world: World, memory: WakeMemory | null): LiveView | null {
  if (world.terminal === null || options.json) return null;
  const { rig, dry, real } = options;
  const wakesAt = rig.plan.followers.map(
    (spec): WakesAt => (spec.wake !== 'rest' && (memory?.recall(spec) ?? null) !== null ? 'last' : 'rest'),
  );
  const cautious = real && !dry && !options.unasked;
  return liveView(world.terminal, world.out, world.env, world.clock, { rig: rig.name, dry, cautious, wakesAt });
}

function openKeyboard(
  world: World,
  view: LiveView,
  hand: Operator,
  followers: number,
  leave: (why: Ending) => void,
): void {
  const read = keyReader(followers);
  world.terminal?.open({
    keys(text) {
      for (const action of read(text)) hand.act(action);
      view.redraw();
    },
    resized: view.redraw,
    gone: () => leave('terminated'),
  });
}

function interruptFromOutside(hand: Operator, say: (sentence: Sentence) => void): void {
  hand.interrupt();
  if (hand.is.asked === 'interrupted') say({ text: PROMPTS.interrupted, weight: 'care' });
}

function messageOf(line: string): string {
  const parsed: unknown = JSON.parse(line);
  return typeof parsed === 'object' && parsed !== null && 'msg' in parsed ? String(parsed.msg) : line;
}
