import type { RigProfiles } from '../rig/compile.ts';
import { type Bench, type Outcome, prompt, type Step } from './bench.ts';
import type { Capture } from './captures.ts';
import { suggestionLines, wantsSmoothing } from './figures.ts';
import { fitCaptures } from './fit.ts';
import { sendHome } from './motion.ts';
import type { Prompt, SessionEffect, SessionEvent } from './prompt.ts';
import { inputsOf, LEGEND, type ListedStep, listed, nameOf, stepsOf } from './step-list.ts';
import type { SuggestWish } from './suggest.ts';

/**
 * A measuring session as a plain state machine: events in, prompts and effects out. It knows no port, file, clock or
 * screen. Every step can be done anew, skipped, or left; what is captured is handed out at once to be kept, and a session
 * that is given those captures again goes on where the former one ended.
 */
export interface Session {
  /** What the operator is asked or told now. */
  readonly prompt: Prompt;
  readonly over: boolean;
  /** The step that is under way cannot go on without readings. */
  readonly listens: boolean;
  take(event: SessionEvent): void;
  /** What is new to be read, in order; each line is handed out once. */
  said(): readonly string[];
  /** What is to be done, in order; each is handed out once. */
  effects(): readonly SessionEffect[];
}

/** Words that are heard at every prompt. */
const HELP = [
  'At any question: list leaves the step and shows all steps, redo begins it',
  'anew, skip marks it skipped, quit leaves the session. Between steps: a number',
  'goes to that step, and fit fits and writes what was measured. What was',
  'captured is kept, and the next session goes on from there.',
];

/** @param wish what smoothing is offered for before the fit; null: none is offered */
export function session(profiles: RigProfiles, captured: readonly Capture[], wish: SuggestWish | null): Session {
  const bench: Bench = {
    profiles,
    captures: [...captured],
    effects: [],
    awake: new Set(),
    cleared: new Set(),
    inputOf: inputsOf(profiles, captured),
    away: null,
  };
  const steps = stepsOf(bench);
  let at: ListedStep | null = null;
  let running: Step<Outcome> | null = null;
  let over = false;
  /** Smoothing was offered, and is to be answered. */
  let offered = false;

  /** What is asked between steps. */
  const between = (lines: readonly string[]): Prompt => {
    const next = steps.findIndex(({ mark }) => mark === 'open');
    const step = steps[next];
    const enter = step === undefined ? 'fit' : `${next + 1} ${nameOf(step)}`;
    return prompt(lines, `Enter: ${enter} (or a number, list, fit, quit, ?): `);
  };
  const list = (): readonly string[] => ['', ...listed(steps), LEGEND, ''];
  const unsaid: string[] = [];
  let shown = prompt([]);
  const show = (next: Prompt): void => {
    shown = next;
    unsaid.push(...next.lines);
  };
  show(
    between([
      ...(captured.length > 0 ? [`${captured.length} captures of an earlier session are taken up.`] : []),
      ...HELP,
      ...list(),
    ]),
  );

  const begin = (step: ListedStep): void => {
    at = step;
    running = step.run();
    proceed(running.next());
  };
  const proceed = (result: IteratorResult<Prompt, Outcome>): void => {
    if (result.done !== true) {
      show(result.value);
      return;
    }
    if (at !== null && result.value.done) at.mark = 'done';
    leave(result.value.lines);
  };
  const leave = (lines: readonly string[]): void => {
    offered = false;
    running?.return({ done: false, lines: [] });
    sendHome(bench);
    running = null;
    at = null;
    show(between(lines));
  };
  const end = (fit: boolean, smooth = false): void => {
    leave([]);
    over = true;
    bench.effects.push({ kind: 'end', fit, smooth });
    show(prompt([]));
  };
  /** Smoothing changes how a rig feels: it is written only to who says so. */
  const offer = (): void => {
    const report = wish === null ? null : fitCaptures(profiles, bench.captures, { rig: '', date: '', wish });
    if (report === null || !wantsSmoothing(report)) {
      end(true);
      return;
    }
    offered = true;
    show(
      prompt(
        [
          'To keep the tips as still as wished:',
          ...suggestionLines(report).map(([joint, what]) => `  ${joint}: ${what}`),
        ],
        'Write this smoothing and these deadbands too (yes, or Enter: no; list: not done yet)? ',
      ),
    );
  };

  const choose = (text: string): void => {
    const next = steps.find(({ mark }) => mark === 'open');
    const chosen = text === '' ? next : steps[Number(text) - 1];
    if (text === 'fit' || (text === '' && next === undefined)) offer();
    else if (chosen !== undefined) begin(chosen);
    else show(prompt([`There is no step ${text}.`], shown.ask));
  };

  const line = (text: string): void => {
    if (offered && (text === '' || text === 'yes' || text === 'no')) {
      end(true, text === 'yes');
      return;
    }
    switch (text) {
      case 'quit':
        end(false);
        return;
      case '?':
        show({ ...shown, lines: HELP });
        return;
      case 'list':
        leave(list());
        return;
      case 'skip':
        if (at !== null) at.mark = 'skipped';
        leave(at === null ? ['There is no step to skip: choose one.'] : [`${nameOf(at)} is skipped.`]);
        return;
      case 'redo': {
        const again = at;
        leave(again === null ? ['Choose the step to do anew by its number.'] : []);
        if (again !== null) begin(again);
        return;
      }
      default:
        if (offered) show(prompt(['Type yes to have it, or Enter for the maps alone.'], shown.ask));
        else if (running === null) choose(text);
        else proceed(running.next({ kind: 'line', text }));
    }
  };

  return {
    get prompt() {
      return shown;
    },
    get over() {
      return over;
    },
    get listens() {
      return at?.listens === true;
    },
    take(event) {
      if (over) return;
      switch (event.kind) {
        case 'line':
          line(event.text.trim());
          return;
        case 'awake':
          bench.awake.add(event.follower);
          break;
        case 'asleep':
          bench.awake.delete(event.follower);
          // Its servos have lost their places: whoever goes on has to clear the arm again.
          bench.cleared.delete(event.follower);
          if (bench.away?.follower === event.follower) {
            bench.away = null;
            leave([`${event.why} The step was left; do it again when the arm is back.`]);
          }
          return;
        case 'silent':
          if (at?.listens === true) leave([`${event.why} The step was left; do it again when readings come.`]);
          return;
        case 'jogged':
          if (event.home) bench.away = null;
          break;
        case 'reading':
          break;
      }
      if (running !== null) proceed(running.next(event));
    },
    said: () => unsaid.splice(0),
    effects: () => bench.effects.splice(0),
  };
}
