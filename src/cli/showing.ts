import type { Word } from '../bridge/board.ts';
import { type Log, type LogLevel, logDestination, openLog } from '../bridge/log.ts';
import { type Sentence, sentences } from '../bridge/words.ts';
import type { CompiledRig } from '../rig/compiled.ts';
import type { Display } from './display.ts';
import { jsonLines } from './json-lines.ts';
import { plainLines } from './plain-lines.ts';
import { type LiveView, liveView, type LiveViewOptions } from './view/live-view.ts';
import type { World } from './world.ts';

export interface ShowingOptions extends LiveViewOptions {
  readonly json: boolean;
  readonly logLevel: LogLevel;
  /** null: standard error, or the view's own lines. */
  readonly logFile: string | null;
}

/** Everything a run has to tell, and where it goes. */
export interface Showing {
  readonly display: Display;
  /** The display, where it is a live view. */
  readonly view: LiveView | null;
  readonly log: Log;
  /** Since the run began, microseconds. */
  atUs(): number;
  say(sentence: Sentence): void;
  /** Says it, and again in `epilogue`: on the screen it would be gone with the screen. */
  sayLast(sentence: Sentence): void;
  /** Says and logs what a board has to tell. */
  hear(word: Word): void;
  /** Tells a fault of this program. */
  bug(fault: unknown): void;
  /** What is told once a screen has been given back. */
  epilogue(): string;
}

export function showing(rig: CompiledRig, options: ShowingOptions, world: World): Showing {
  const { clock, env, out, err, terminal } = world;
  const startUs = clock.nowUs();
  const speak = sentences(rig);
  const view = terminal === null || options.json ? null : liveView(terminal, out, env, clock, options);
  const display = view ?? (options.json ? jsonLines(out, err) : plainLines(out, err));
  const ownsScreen = view !== null && options.logFile === null;
  const toScreen = { write: (line: string) => self.say({ text: messageOf(line), weight: 'care' }) };
  const to = ownsScreen ? toScreen : logDestination(options.logFile);
  const log = openLog({ level: options.logLevel, clock, to });
  let later = '';

  const self: Showing = {
    display,
    view,
    log,
    atUs: () => clock.nowUs() - startUs,
    say: (sentence) => display.say(sentence, self.atUs()),
    sayLast(sentence) {
      self.say(sentence);
      later += `${sentence.text}\n`;
    },
    hear(word) {
      const sentence = speak(word);
      self.say(sentence);
      if (!ownsScreen) log.info(word, sentence.text);
    },
    bug(fault) {
      const told = fault instanceof Error ? fault.stack : String(fault);
      if (ownsScreen) later += `a fault of this program: ${told}\n`;
      else log.fatal({ err: fault }, `a fault of this program: ${String(fault)}`);
    },
    epilogue: () => later,
  };
  return self;
}

function messageOf(line: string): string {
  const parsed: unknown = JSON.parse(line);
  return typeof parsed === 'object' && parsed !== null && 'msg' in parsed ? String(parsed.msg) : line;
}
