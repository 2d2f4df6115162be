import type { Clock } from '../../clock/clock.ts';
import type { Display, Look } from '../display.ts';
import { messages } from '../messages.ts';
import { PROMPTS } from '../operator.ts';
import type { Outlet } from '../outlet.ts';
import type { Terminal } from '../terminal.ts';
import { frame } from './frame.ts';
import { depthOf, paintFor } from './paint.ts';
import type { Scene, WakesAt } from './scene.ts';
import { shapesFor } from './shapes.ts';

export interface LiveViewOptions {
  readonly rig: string;
  readonly dry: boolean;
  /** Real arms may move: show what has to be known until the operator lets one go. */
  readonly cautious: boolean;
  /** What each follower wakes at when it has been told nothing yet. */
  readonly wakesAt: readonly WakesAt[];
}

/** The live view: the whole picture, drawn anew at each look and never waited for. */
export interface LiveView extends Display {
  /** Draws at once what a key has changed. */
  redraw(): void;
}

/** How long a picture that is still on its way is waited for at the end. */
const LAST_PICTURE_US = 300_000;
/** Arms that stop together ring once. */
const BELL_APART_US = 300_000;

export function liveView(
  terminal: Terminal,
  out: Outlet,
  env: NodeJS.ProcessEnv,
  clock: Clock,
  options: LiveViewOptions,
): LiveView {
  const paint = paintFor(depthOf(env));
  const shapes = shapesFor(env);
  const heard = messages();
  let last: Look | null = null;
  let rangUs = Number.NEGATIVE_INFINITY;

  const sceneOf = ({ atUs, status, perSecond, operator, along }: Look): Scene => ({
    rig: options.rig,
    dry: options.dry,
    nowUs: atUs,
    status,
    along,
    perSecond,
    // Who has been told something wakes where that was.
    wakesAt: status.followers.map(({ commands }, f) => (commands > 0 ? 'last' : (options.wakesAt[f] ?? 'rest'))),
    selected: operator.selected,
    messages: heard.list,
    cautions: options.cautious && operator.untouched,
    prompt: operator.asked === null ? null : PROMPTS[operator.asked],
    help: operator.help,
  });

  const redraw = (): void => {
    if (last === null) return;
    terminal.draw(frame(sceneOf(last), terminal.size(), shapes).map(paint));
  };

  return {
    redraw,
    look(look) {
      last = look;
      redraw();
    },
    changed({ atUs, follower, from, to, reasons }) {
      if (from !== 'following') return;
      const why = reasons.length === 0 ? '' : `: ${reasons.join('; ')}`;
      heard.add({ text: `${follower} has stopped following and is ${to}${why}`, weight: 'care' }, atUs);
      if (clock.nowUs() - rangUs < BELL_APART_US) return;
      rangUs = clock.nowUs();
      terminal.bell();
    },
    say: (sentence, atUs) => heard.add(sentence, atUs),
    async end(look) {
      last = look;
      // A picture that arrives after the screen was given back would stand in the middle of the shell.
      await out.flush(LAST_PICTURE_US);
      terminal.close();
    },
  };
}
