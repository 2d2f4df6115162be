import type { Key } from '../drive/events.ts';
import type { CompanionKey } from './companion.ts';

/** What a key of the live view does. */
export type Action =
  | { readonly kind: 'ask'; readonly key: Exclude<Key, 'pace' | 'mark'> }
  | { readonly kind: 'pace'; readonly step: 1 | -1 }
  | { readonly kind: 'companion'; readonly key: CompanionKey }
  /** Index in the rig. */
  | { readonly kind: 'select'; readonly follower: number }
  | { readonly kind: 'select_all' | 'help' | 'back' | 'quit' | 'interrupt' };

interface KeyBinding {
  /** As shown to the operator. */
  readonly sign: string;
  readonly label: string;
  readonly help: string;
  readonly bytes: readonly string[];
  readonly action: Action;
}

/** In the order they are shown where there is little room: what halts comes first. */
export const BINDINGS: readonly KeyBinding[] = [
  {
    sign: 'space',
    label: 'STOP ALL',
    help: 'stop every follower, whichever is selected; r, then j goes on',
    bytes: [' '],
    action: { kind: 'ask', key: 'stop' },
  },
  {
    sign: 'h',
    label: 'hold',
    help: 'brake and hold; j goes on',
    bytes: ['h'],
    action: { kind: 'ask', key: 'hold' },
  },
  {
    sign: 'g',
    label: 'go',
    help: 'let a waking or limp arm start, from the pose that is shown',
    bytes: ['g'],
    action: { kind: 'ask', key: 'go' },
  },
  {
    sign: 'j',
    label: 'join',
    help: 'move gently to the leader, then follow it',
    bytes: ['j'],
    action: { kind: 'ask', key: 'join' },
  },
  {
    sign: 'p',
    label: 'park',
    help: 'move gently to the rest pose and hold there',
    bytes: ['p'],
    action: { kind: 'ask', key: 'park' },
  },
  {
    sign: 'r',
    label: 'rearm',
    help: 'undo a stop; moves nothing',
    bytes: ['r'],
    action: { kind: 'ask', key: 'rearm' },
  },
  {
    sign: 'c',
    label: 'clutch',
    help: 'let go of an arm, move the leader, take hold again without a jump',
    bytes: ['c'],
    action: { kind: 'ask', key: 'clutch' },
  },
  {
    sign: '-',
    label: 'slower',
    help: 'pace down: 100, 50, 25, 10 % of every speed limit',
    bytes: ['-', '_'],
    action: { kind: 'pace', step: -1 },
  },
  {
    sign: '+',
    label: 'faster',
    help: 'pace up: 10, 25, 50, 100 %',
    bytes: ['+', '='],
    action: { kind: 'pace', step: 1 },
  },
  {
    sign: 'l',
    label: 'limp',
    help: 'park, then end the pulses: what the arm then does is its own matter',
    bytes: ['l'],
    action: { kind: 'ask', key: 'limp' },
  },
  {
    sign: 'm',
    label: 'mark',
    help: 'name this moment in the take that is being recorded',
    bytes: ['m'],
    action: { kind: 'companion', key: 'mark' },
  },
  {
    sign: 't',
    label: 'take',
    help: 'begin a recording under the next free name, or end it',
    bytes: ['t'],
    action: { kind: 'companion', key: 'record' },
  },
  {
    sign: 'o',
    label: 'hand over',
    help: 'while a take plays: the hand leads from here, or the take again',
    bytes: ['o'],
    action: { kind: 'companion', key: 'hand_over' },
  },
  {
    sign: '0',
    label: 'all',
    help: 'keys are for every follower',
    bytes: ['0', 'a'],
    action: { kind: 'select_all' },
  },
  {
    sign: 'q',
    label: 'leave',
    help: 'end the run; asks while an arm is awake',
    bytes: ['q'],
    action: { kind: 'quit' },
  },
  { sign: '?', label: 'help', help: 'this page, and back', bytes: ['?'], action: { kind: 'help' } },
];

/** Digits select followers; they stand apart because how many there are depends on the rig. */
export const SELECT_HELP = 'keys are for that follower only; more digits add or take away';
export const INTERRUPT_HELP = 'every follower brakes and holds, whichever is selected; again: leave';

const CTRL_C = '\x03';
const ESC = '\x1b';
const PASTE_BEGINS = '[200~';
const PASTE_ENDS = '\x1b[201~';
/** Introducers of the sequences that terminals send for arrows, function keys and the mouse (ECMA-48, 5.4). */
const SEQUENCE = /^\[[\x30-\x3f]*[\x20-\x2f]*[\x40-\x7e]|^O[\x40-\x7e]/;
const SEQUENCE_BEGINS = /^\[[\x30-\x3f]*[\x20-\x2f]*$|^O$/;
const SEQUENCE_LENGTH_MAX = 32;

/**
 * Reads what a terminal sends into actions. Letters count in either case, since nobody looks at Caps Lock in a fright.
 * Sequences of other keys are skipped whole, and so is pasted text: nothing that was not pressed as a key moves an arm.
 * @param followers how many there are to select
 */
export function keyReader(followers: number): (text: string) => readonly Action[] {
  const actions = new Map<string, Action>([
    ...BINDINGS.flatMap(({ bytes, action }) => bytes.map((byte) => [byte, action] as const)),
    ...Array.from({ length: Math.min(followers, 9) }, (_, f) => [`${f + 1}`, { kind: 'select', follower: f }] as const),
    [CTRL_C, { kind: 'interrupt' }],
  ]);
  /** The beginning of a sequence that the last piece of input cut short. */
  let begun = '';
  let escaped = false;
  let pasting = false;

  /** Takes what it knows from the front of `text` and returns the rest; null: the rest is still to come. */
  const take = (text: string, found: Action[]): string | null => {
    if (pasting) return takePaste(text, found);
    if (!text.startsWith(ESC)) {
      const action = actions.get(text.slice(0, 1).toLowerCase());
      if (action !== undefined) found.push(action);
      return text.slice(1);
    }
    const after = text.slice(1);
    const sequence = SEQUENCE.exec(after)?.[0];
    if (sequence !== undefined) {
      pasting = sequence === PASTE_BEGINS;
      return after.slice(sequence.length);
    }
    if (SEQUENCE_BEGINS.test(after) && after.length < SEQUENCE_LENGTH_MAX) {
      begun = text;
      return null;
    }
    escaped = after === '';
    found.push({ kind: 'back' });
    return after;
  };

  const takePaste = (text: string, found: Action[]): string | null => {
    const end = text.indexOf(PASTE_ENDS);
    const pasted = end < 0 ? text : text.slice(0, end);
    // Heard even in a paste that never ends.
    if (pasted.includes(CTRL_C)) found.push({ kind: 'interrupt' });
    if (end < 0) {
      const tail = text.lastIndexOf(ESC);
      begun = tail >= 0 && PASTE_ENDS.startsWith(text.slice(tail)) ? text.slice(tail) : '';
      return null;
    }
    pasting = false;
    return text.slice(end + PASTE_ENDS.length);
  };

  return (text) => {
    const found: Action[] = [];
    // A sequence may be cut right after its first byte, which by itself looks like the escape key.
    const isCut = escaped && /^[[O]/.test(text);
    let rest: string | null = (isCut ? ESC : begun) + text;
    escaped = false;
    begun = '';
    while (rest !== null && rest !== '') rest = take(rest, found);
    return found;
  };
}
