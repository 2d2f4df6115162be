import type { Key } from '../drive/events.ts';
import { ALL } from '../drive/events.ts';
import type { CompanionKey } from './companion.ts';
import type { Action } from './keys.ts';

/** What an operator's hand on the keyboard comes to: keys for the drive, and when to leave. It keeps no time. */
export interface Operator {
  readonly is: Readonly<OperatorStanding>;
  act(action: Action): void;
  /** Ctrl-C or SIGINT. */
  interrupt(): void;
  /** Park everything and then leave, unless something comes between. */
  parkAndLeave(): void;
  /** Not every arm could be parked: who asked for it is still there to decide. */
  stay(): void;
}

export interface OperatorStanding {
  /** Which followers the keys are for, in rig order. */
  readonly selected: boolean[];
  help: boolean;
  /** The question that stands: after Ctrl-C, after the key that leaves, or while it parks to leave. */
  asked: 'interrupted' | 'quitting' | 'parking' | null;
  /** Nobody has let an arm move yet. */
  untouched: boolean;
}

export interface OperatorEffects {
  /** @param value only for `pace`: share of the speed limits */
  key(key: Key, follower: number, value: number): void;
  /** The present share of the speed limits. */
  pace(): number;
  /** True while leaving would leave an arm behind that has pulses. */
  awake(): boolean;
  leave(why: 'interrupted' | 'quit'): void;
  /** Keys of what goes along with the run. */
  companion(key: CompanionKey): void;
}

/** The steps that the pace keys take: shares of the speed limits, rising. */
const PACES = [0.1, 0.25, 0.5, 1] as const;

/** Keys after which arms may move: who presses one has left the fright behind, and the next Ctrl-C is a first one again. */
const MOVES: ReadonlySet<Key> = new Set<Key>(['go', 'join', 'park', 'limp']);

export const PROMPTS: Readonly<Record<NonNullable<OperatorStanding['asked']>, string>> = {
  interrupted: 'All brake and hold.  p: park   j: join again   Ctrl-C: leave them as they are',
  quitting: 'All held. Leave?  p: park, then leave   q: leave them as they are   j: stay',
  parking: 'Parking, then leaving.  h: hold and stay',
};

export function operator(followers: number, effects: OperatorEffects): Operator {
  const is: OperatorStanding = {
    selected: Array.from({ length: followers }, () => true),
    help: false,
    asked: null,
    untouched: true,
  };
  const isAll = (): boolean => !is.selected.includes(false);

  const send = (key: Key): void => {
    // In a fright nobody looks which follower is selected.
    if (key === 'stop' || isAll()) {
      effects.key(key, ALL, 0);
      return;
    }
    is.selected.forEach((on, follower) => {
      if (on) effects.key(key, follower, 0);
    });
  };

  const ask = (key: Key): void => {
    if (key === 'park' && (is.asked === 'interrupted' || is.asked === 'quitting')) {
      const leaves = is.asked === 'quitting';
      is.asked = null;
      if (leaves) self.parkAndLeave();
      else effects.key('park', ALL, 0);
      return;
    }
    if (MOVES.has(key)) {
      is.asked = null;
      is.untouched = false;
    } else if (is.asked === 'parking') is.asked = null;
    send(key);
  };

  const setPace = (step: 1 | -1): void => {
    const now = effects.pace();
    const next = step > 0 ? PACES.find((pace) => pace > now) : PACES.findLast((pace) => pace < now);
    if (next !== undefined) effects.key('pace', ALL, next);
  };

  const select = (follower: number): void => {
    // From "all", a digit picks one out; after that digits add and take away. None at all is all again.
    if (isAll()) is.selected.fill(false);
    is.selected[follower] = is.selected[follower] !== true;
    if (!is.selected.includes(true)) is.selected.fill(true);
  };

  const quit = (): void => {
    if (is.asked === 'quitting' || !effects.awake()) {
      effects.leave('quit');
      return;
    }
    effects.key('hold', ALL, 0);
    is.asked = 'quitting';
  };

  const self: Operator = {
    is,
    act(action) {
      switch (action.kind) {
        case 'ask':
          return ask(action.key);
        case 'pace':
          return setPace(action.step);
        case 'companion':
          return effects.companion(action.key);
        case 'select':
          return select(action.follower);
        case 'select_all':
          is.selected.fill(true);
          return;
        case 'help':
          is.help = !is.help;
          return;
        case 'back':
          is.help = false;
          if (is.asked !== 'parking') is.asked = null;
          return;
        case 'quit':
          return quit();
        case 'interrupt':
          return self.interrupt();
      }
    },
    interrupt() {
      if (is.asked === 'interrupted') {
        effects.leave('interrupted');
        return;
      }
      effects.key('hold', ALL, 0);
      is.asked = 'interrupted';
      is.help = false;
    },
    stay() {
      is.asked = null;
    },
    parkAndLeave() {
      effects.key('park', ALL, 0);
      is.asked = 'parking';
      is.untouched = false;
    },
  };
  return self;
}
