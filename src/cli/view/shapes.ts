import type { State } from '../../follower/states.ts';
import type { Tone } from './layout.ts';

/** The signs of the view, one column each. */
export interface Shapes {
  readonly states: Readonly<Record<State, string>>;
  /** Ends and middle of a joint's range. */
  readonly barLeft: string;
  readonly barRight: string;
  readonly bar: string;
  readonly angle: string;
  readonly target: string;
  readonly both: string;
  readonly cut: string;
  readonly care: string;
  readonly note: string;
  readonly degree: string;
}

const DRAWN: Shapes = {
  states: {
    absent: '○',
    waking: '◐',
    joining: '»',
    following: '►',
    holding: '‖',
    parking: '↓',
    limp: '~',
    jogging: '≈',
    stopped: '■',
  },
  barLeft: '├',
  barRight: '┤',
  bar: '─',
  angle: '●',
  target: '◇',
  both: '◆',
  cut: '…',
  care: '▲',
  note: '·',
  degree: '°',
};

const TYPED: Shapes = {
  states: {
    absent: 'o',
    waking: '?',
    joining: '+',
    following: '>',
    holding: '=',
    parking: 'v',
    limp: '~',
    jogging: '%',
    stopped: '#',
  },
  barLeft: '[',
  barRight: ']',
  bar: '-',
  angle: 'O',
  target: 'x',
  both: '@',
  cut: '~',
  care: '!',
  note: '.',
  degree: ' ',
};

/** Drawn signs where the terminal's character set holds them, typed ones elsewhere. */
export function shapesFor(env: NodeJS.ProcessEnv): Shapes {
  const charset = env['LC_ALL'] || env['LC_CTYPE'] || env['LANG'] || '';
  return /utf-?8/i.test(charset) || process.platform === 'win32' ? DRAWN : TYPED;
}

export const STATE_TONES: Readonly<Record<State, Tone>> = {
  absent: 'off',
  waking: 'waiting',
  joining: 'moving',
  following: 'good',
  holding: 'held',
  parking: 'moving',
  limp: 'off',
  jogging: 'moving',
  stopped: 'bad',
};
