import { createInterface, type Interface } from 'node:readline/promises';
import { type Live, live as makeLive } from '../bridge/live.ts';
import { CAUTIONS, sentences } from '../bridge/words.ts';
import { type Cancel, type Clock, US_PER_MS, US_PER_S } from '../clock/clock.ts';
import type { Capture } from '../fit/captures.ts';
import type { SessionEffect, Tape } from '../fit/prompt.ts';
import type { SuggestWish } from '../fit/suggest.ts';
import { session as makeSession } from '../fit/session.ts';
import type { Port } from '../port/types.ts';
import type { CompiledBoard } from '../rig/compiled.ts';
import type { LoadedRig } from '../rig/load.ts';
import type { Keeper } from './fit-keeper.ts';
import { rigToMeasure } from './fit-rig.ts';
import { wrapped } from './view/layout.ts';

/** Where a session meets its operator, its boards and its disk; a test is such a place too. */
export interface FitTable {
  readonly clock: Clock;
  readonly openPort: (board: CompiledBoard) => Port;
  readonly input: NodeJS.ReadableStream;
  readonly output: NodeJS.WritableStream;
  /** The output is a terminal: lines are edited on it, and the tape is drawn anew in its place. */
  readonly isTerminal: boolean;
  /** Characters in a line of it, now. */
  readonly columns: () => number;
}

/** `fit`: what was captured is to be fitted; `smoothed`: and the suggested smoothing written too; `quit`: it is left; `interrupted`: somebody was frightened. */
export type FitEnding = 'fit' | 'smoothed' | 'quit' | 'interrupted';

const LOOK_US = 20 * US_PER_MS;
/** A servo has come to rest this long after its last pulse changed. */
const SETTLE_US = 400 * US_PER_MS;
/** The tape is drawn five times a second: more flickers. */
const DRAW_US = 200 * US_PER_MS;
/** The longest way home: the whole span of a servo, at the speed of a jog. */
const HOME_US = 25 * US_PER_S;
const STILL_US = US_PER_S;
/** A board that sends nothing for so long has lost its cable, or its mind. */
const SILENT_US = 3 * US_PER_S;

interface Asked {
  readonly follower: number;
  readonly servo: number;
  readonly pulseUs: number;
  /** Since when it has been there; NaN: not yet. */
  sinceUs: number;
}

/**
 * Runs one session at a terminal until its operator ends it.
 * @param wish what smoothing is offered for; null: none
 */
export async function measure(
  { rig, profiles }: Pick<LoadedRig, 'rig' | 'profiles'>,
  captured: readonly Capture[],
  wish: SuggestWish | null,
  keeping: Keeper,
  table: FitTable,
): Promise<FitEnding> {
  const { clock } = table;
  const measured = rigToMeasure(rig);
  const session = makeSession(profiles, captured, wish);
  const speak = sentences(measured);
  const rl: Interface = createInterface({ input: table.input, output: table.output, terminal: table.isTerminal });
  const waking = new Set<number>();
  const awake = new Set<number>();
  let asked: Asked | null = null;
  let ending: FitEnding | null = null;
  let endUs = Number.POSITIVE_INFINITY;
  let finish: (why: FitEnding) => void = () => {};
  const over = new Promise<FitEnding>((resolve) => (finish = resolve));
  let drawn = '';
  /** The last reading, or when it last did not matter. */
  let heardUs = clock.nowUs();
  let drawnUs = Number.NEGATIVE_INFINITY;

  const print = (text: string): void => {
    // In place of the question, which is then asked anew below; on a narrow terminal it has several lines.
    if (drawn !== '') table.output.write(table.isTerminal ? `${up(rl.getCursorPos().rows)}\r\x1b[J` : '\n');
    for (const line of text.split('\n'))
      table.output.write(`${line.length > table.columns() ? wrapped(line, table.columns()).join('\n') : line}\n`);
    drawn = '';
  };

  /** The question stands again at once: a person may be about to press Enter, and would answer nothing that can be seen. */
  const tell = (text: string): void => {
    print(text);
    show();
  };

  const live: Live = makeLive({
    rig: measured,
    clock,
    openPort: table.openPort,
    memory: null,
    unasked: false,
    dry: false,
    say: (word) => tell(speak(word).text),
    onBug: (follower, bug) => tell(`${follower} is given up after a fault of this program: ${String(bug)}`),
  });

  const effect = (wanted: SessionEffect): void => {
    switch (wanted.kind) {
      case 'keep':
        keeping.keep(wanted.captures);
        return;
      case 'wake':
        waking.add(wanted.follower);
        return;
      case 'jog':
        asked = { follower: wanted.follower, servo: wanted.servo, pulseUs: wanted.pulseUs, sinceUs: Number.NaN };
        live.jog(wanted.follower, wanted.servo, wanted.pulseUs);
        return;
      case 'end':
        ending ??= wanted.smooth ? 'smoothed' : wanted.fit ? 'fit' : 'quit';
        endUs = clock.nowUs() + HOME_US;
        return;
    }
  };

  const show = (): void => {
    for (const text of session.said()) print(text);
    const { ask, tape } = session.prompt;
    const question = ask === null ? '' : `${tape === null || !table.isTerminal ? '' : `${tapeText(tape)}  `}${ask}`;
    if (question === drawn) return;
    const isOnlyTape = tape !== null && drawn !== '';
    if (isOnlyTape && clock.nowUs() - drawnUs < DRAW_US) return;
    drawn = question;
    drawnUs = clock.nowUs();
    if (question === '') return;
    rl.setPrompt(question);
    rl.prompt(true);
  };

  const after = (): void => {
    try {
      for (const wanted of session.effects()) effect(wanted);
    } catch (fault) {
      print(
        `The captures cannot be kept: ${fault instanceof Error ? fault.message : String(fault)}; make room, then start again.`,
      );
      finish('interrupted');
      return;
    }
    show();
    // What is away goes home first, if it still can.
    if (ending !== null && (asked === null || clock.nowUs() > endUs)) finish(ending);
  };

  /** Follows what the arms do, and tells the session. */
  const look = (): void => {
    const nowUs = clock.nowUs();
    live.drive.followers.forEach(({ is, spec }, follower) => {
      const stands = is.present && is.pulsed && (is.state === 'holding' || is.state === 'jogging');
      // Its board may have yet to answer, or may answer again.
      if (waking.has(follower) && is.state === 'waking' && !is.going) live.key('go', follower);
      if (waking.has(follower) && is.present && is.pulsed && !stands) live.key('hold', follower);
      if (waking.has(follower) && stands) {
        waking.delete(follower);
        awake.add(follower);
        session.take({ kind: 'awake', follower });
      } else if (awake.has(follower) && !(is.present && is.pulsed)) {
        awake.delete(follower);
        if (asked?.follower === follower) asked = null;
        session.take({ kind: 'asleep', follower, why: `${spec.name} has lost its pulses.` });
      }
    });
    if (asked !== null) jogging(asked, nowUs);
    if (!session.listens) heardUs = nowUs;
    else if (nowUs - heardUs > SILENT_US)
      session.take({ kind: 'silent', why: `${measured.plan.leader.name} sends no readings; look to its port.` });
    after();
    cancel = clock.at(nowUs + LOOK_US, look);
  };

  const jogging = (now: Asked, nowUs: number): void => {
    const { is, arm } = live.drive.followers[now.follower] as Live['drive']['followers'][number];
    const isHome = Number.isNaN(now.pulseUs);
    const there = isHome
      ? is.state !== 'jogging'
      : is.state === 'jogging' && arm.frame.pulsesUs[now.servo] === now.pulseUs;
    if (!there) {
      now.sinceUs = Number.NaN;
      // Asked for while it was not holding yet: ask again.
      if (!isHome && is.state === 'holding' && !is.moving) live.jog(now.follower, now.servo, now.pulseUs);
      return;
    }
    if (Number.isNaN(now.sinceUs)) now.sinceUs = nowUs;
    if (nowUs - now.sinceUs < SETTLE_US) return;
    asked = null;
    session.take({ kind: 'jogged', follower: now.follower, home: isHome });
  };

  const readings = live.events$.subscribe((event) => {
    if (event.kind !== 'reading') return;
    heardUs = clock.nowUs();
    session.take({ kind: 'reading', tUs: event.tUs, counts: event.counts });
  });
  const interrupt = (): void => {
    // Nothing goes home: a frightened hand wants everything to stay where it is.
    live.key('hold');
    finish('interrupted');
  };
  rl.on('line', (text) => {
    // A terminal shows the line and its end by itself.
    if (!table.isTerminal && drawn !== '') table.output.write('\n');
    drawn = '';
    session.take({ kind: 'line', text });
    after();
  });
  rl.on('SIGINT', interrupt);
  rl.on('close', interrupt);

  print(CAUTIONS.join('\n'));
  let cancel: Cancel = clock.at(clock.nowUs() + LOOK_US, look);
  after();
  const why = await over;
  cancel();
  rl.off('close', interrupt);
  rl.close();
  readings.unsubscribe();
  await live.still(STILL_US);
  await live.close();
  keeping.close();
  return why;
}

function up(rows: number): string {
  return rows > 0 ? `\x1b[${rows}A` : '';
}

/** `|--####----####--| 512`: where it has been, and where it is. */
function tapeText({ lowest, highest, visited, now }: Tape): string {
  const here = Math.floor(((now - lowest) / (highest - lowest)) * visited.length);
  const cells = Array.from(visited, (seen, i) => (i === here ? 'o' : seen === 1 ? '#' : '-'));
  return `|${cells.join('')}| ${Number.isNaN(now) ? 'no reading' : Math.round(now)}`;
}
