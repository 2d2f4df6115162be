import { live as makeLive, type Live } from '../bridge/live.ts';
import type { LogLevel } from '../bridge/log.ts';
import type { WakeMemory } from '../bridge/wake-memory.ts';
import { CAUTIONS, ENDINGS, INTERRUPTED, LEAD_CHANGES, leftHolding, notParked } from '../bridge/words.ts';
import { type Cancel, US_PER_MS } from '../clock/clock.ts';
import type { Port } from '../port/types.ts';
import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';
import { watchStates } from './changes.ts';
import type { Companion } from './companion.ts';
import type { Look } from './display.ts';
import { broughtToStand, end, type End, exitStatus } from './ending.ts';
import { keyReader } from './keys.ts';
import { type Operator, operator } from './operator.ts';
import { parking, type ParkingOutcome } from './parking.ts';
import { rates } from './rates.ts';
import { type Showing, showing } from './showing.ts';
import { reasons } from './view/follower-block.ts';
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
  /** Real arms may move: what has to be known is said, leaving asks, and time ends in parking. */
  readonly real: boolean;
  /** How long, microseconds; null: until somebody ends it. */
  readonly forUs: number | null;
  readonly json: boolean;
  readonly logLevel: LogLevel;
  readonly logFile: string | null;
  /** What goes along: a recording, a take that plays. */
  readonly companion?: Companion;
}

const LOOK_US = 100 * US_PER_MS;
const FLUSH_US = 500 * US_PER_MS;

/** Drives a rig until somebody or something ends it; resolves with the exit status. */
export async function driving(options: DrivingOptions, world: World): Promise<number> {
  const { rig, dry, companion } = options;
  const { clock, out, err } = world;
  const moves = options.real && !dry;
  warm(rig);
  if (moves) err.write(`${CAUTIONS.join('\n')}\n`);

  const memory = options.memory((detail) =>
    show.say({ text: `the wake pose cannot be kept: ${detail}`, weight: 'care' }),
  );
  const view = { rig: rig.name, dry, cautious: moves && !options.unasked, wakesAt: wakesAt(rig, memory) };
  const show = showing(rig, { ...options, ...view }, world);
  const live = makeLive({
    rig,
    clock,
    openPort: options.openPort,
    memory,
    unasked: options.unasked,
    dry,
    say: show.hear,
    ...(companion === undefined ? {} : { onStart: companion.onStart }),
    onBug: (follower, bug) => show.log.error({ follower, err: bug }, `${follower} is given up: ${String(bug)}`),
  });
  const over = end();
  const hand = operator(rig.plan.followers.length, {
    key: (key, follower, value) => live.key(key, follower, value),
    pace: () => live.drive.common.pace[0] as number,
    awake: () => moves && live.drive.followers.some(({ is }) => is.present && is.pulsed),
    leave: over.because,
    companion: (key) => companion?.key(key),
  });
  const { say, sayLast } = show;
  companion?.begin({ live, clock, say, sayLast, parkAndLeave: hand.parkAndLeave, leave: () => over.because('over') });
  const cancels = [tellStates(live, show), listenTo(world, hand, show, over, moves)];
  openKeyboard(world, rig.plan.followers.length, hand, show, over);
  const time = { isUp: false };
  const looking = lookAround(live, hand, show, over, world, time, companion);
  if (options.forUs !== null) {
    const timeIsUp = (): void => {
      time.isUp = true;
      if (options.real) hand.parkAndLeave();
      else over.because('over');
    };
    cancels.push(clock.at(clock.nowUs() + options.forUs, timeIsUp));
  }

  const why = await over.why;
  const still = await broughtToStand(live, why, over.hurried);
  const last = looking.end();
  await live.close();
  const isWell = (await companion?.end()) ?? true;
  await show.display.end(last, why);
  if (show.view !== null) err.write(`${show.epilogue()}${rig.name}: ${ENDINGS[why]}\n`);
  const holding = live.drive.followers.filter(({ is }) => is.present && is.pulsed).map(({ spec }) => spec.name);
  if (moves && holding.length > 0) err.write(`${leftHolding(holding, still)}\n`);
  await Promise.all([out.flush(FLUSH_US), err.flush(FLUSH_US)]);
  for (const cancel of cancels) cancel();
  return isWell ? exitStatus(why, still) : Math.max(1, exitStatus(why, still));
}

function wakesAt(rig: CompiledRig, memory: WakeMemory | null): readonly WakesAt[] {
  return rig.plan.followers.map((spec) => {
    const isKnown = spec.wake !== 'rest' && (memory?.recall(spec) ?? null) !== null;
    return isKnown ? 'last' : 'rest';
  });
}

function tellStates(live: Live, { display, atUs }: Showing): Cancel {
  return watchStates(live, (f, from, to, by) => {
    const { followers, boards } = live.status();
    const status = followers[f] as (typeof followers)[number];
    const port = boards.find((board) => board.followers.includes(status.follower)) ?? null;
    // Whoever leads from now on has said nothing yet, in the very instant in which it takes over.
    const why = by.kind === 'lead' ? [LEAD_CHANGES] : reasons(status, port);
    display.changed({ atUs: atUs(), follower: status.follower, from, to, reasons: why });
  });
}

function listenTo(world: World, hand: Operator, show: Showing, over: End, moves: boolean): Cancel {
  return world.listen({
    signal(name) {
      if (name !== 'SIGINT') return over.because('terminated');
      // Who watches no screen and moves no arm has nothing to think over.
      if (show.view === null && !moves) return over.because('interrupted');
      hand.interrupt();
      if (show.view !== null) show.view.redraw();
      else if (hand.is.asked === 'interrupted') show.say({ text: INTERRUPTED, weight: 'care' });
    },
    outClosed: (fault) => over.because(fault.code === 'EPIPE' ? 'terminated' : 'broken'),
    bug(fault) {
      show.bug(fault);
      over.because('broken');
    },
  });
}

function openKeyboard(world: World, followers: number, hand: Operator, { view }: Showing, over: End): void {
  if (view === null) return;
  const read = keyReader(followers);
  world.terminal?.open({
    keys(text) {
      for (const action of read(text)) hand.act(action);
      view.redraw();
    },
    resized: view.redraw,
    gone: () => over.because('terminated'),
  });
}

/** Shows how all stands, ten times a second, and follows arms home that are to be parked before leaving. */
function lookAround(
  live: Live,
  hand: Operator,
  show: Showing,
  over: End,
  { clock }: World,
  time: { readonly isUp: boolean },
  companion: Companion | undefined,
): { end(): Look } {
  const rate = rates(live.drive.followers.length);
  let outcome: (() => ParkingOutcome) | null = null;

  const take = (): Look => {
    const status = live.status();
    rate.push(status);
    const along = companion?.standing() ?? '';
    return { atUs: show.atUs(), status, perSecond: rate.perSecond, operator: hand.is, along };
  };

  const followHome = (): void => {
    outcome = hand.is.asked === 'parking' ? (outcome ?? parking(live.drive, clock)) : null;
    const found = outcome?.() ?? 'under way';
    if (found === 'under way') return;
    if (found === 'parked') return over.because('parked');
    const sentence = { text: notParked(found.not), weight: 'care' as const };
    // Whoever asked for it at the keyboard is still there to decide; when the time is up nobody may be.
    if (!time.isUp) {
      show.say(sentence);
      return hand.stay();
    }
    show.sayLast(sentence);
    over.because('unparked');
  };

  const look = (): void => {
    cancel = clock.at(clock.nowUs() + LOOK_US, look);
    show.display.look(take());
    followHome();
  };
  let cancel = clock.at(clock.nowUs(), look);

  return {
    end() {
      cancel();
      return take();
    },
  };
}
