import type { Line, Tone } from './layout.ts';

/** How many colours a terminal shows. */
export type Depth = 'none' | '256' | 'full';

/** Turns a line into text with its colours switched on and off by SGR sequences (ECMA-48). */
export type Paint = (line: Line) => string;

type Rgb = readonly [red: number, green: number, blue: number];

/** M. Okabe and K. Ito, "Color Universal Design", 2008: told apart with every common kind of colour vision. */
const ORANGE: Rgb = [230, 159, 0];
const SKY_BLUE: Rgb = [86, 180, 233];
const BLUISH_GREEN: Rgb = [0, 158, 115];
const YELLOW: Rgb = [240, 228, 66];
const VERMILLION: Rgb = [213, 94, 0];
const REDDISH_PURPLE: Rgb = [204, 121, 167];

const COLOURS: Readonly<Partial<Record<Tone, Rgb>>> = {
  good: BLUISH_GREEN,
  moving: SKY_BLUE,
  waiting: YELLOW,
  held: ORANGE,
  bad: VERMILLION,
  off: REDDISH_PURPLE,
};

/** Weight carries no colour, so NO_COLOR keeps it. */
const WEIGHTS: Readonly<Partial<Record<Tone, number>>> = { strong: 1, bad: 1, dim: 2 };

/** What the terminal shows, from what it says of itself; https://no-color.org asks for none where NO_COLOR is not empty. */
export function depthOf(env: NodeJS.ProcessEnv): Depth {
  if (env['NO_COLOR']) return 'none';
  if (/^(truecolor|24bit)$/i.test(env['COLORTERM'] ?? '')) return 'full';
  return /256|direct/.test(env['TERM'] ?? '') || process.platform === 'win32' ? '256' : 'none';
}

export function paintFor(depth: Depth): Paint {
  const codes = new Map<Tone, string>();
  const codeOf = (tone: Tone): string => {
    let code = codes.get(tone);
    if (code === undefined) {
      code = sgr(tone, depth);
      codes.set(tone, code);
    }
    return code;
  };
  return (line) => {
    let text = '';
    let open = '';
    for (const part of line) {
      if (part.text === '') continue;
      const code = codeOf(part.tone);
      // Neighbours of one colour need one switch: the way to the terminal may be slow.
      if (code !== open) text += `${open === '' ? '' : OFF}${code === '' ? '' : `\x1b[${code}m`}`;
      text += part.text;
      open = code;
    }
    return open === '' ? text : text + OFF;
  };
}

const OFF = '\x1b[0m';

function sgr(tone: Tone, depth: Depth): string {
  const colour = depth === 'none' ? undefined : COLOURS[tone];
  const weight = WEIGHTS[tone];
  const parts = weight === undefined ? [] : [String(weight)];
  if (colour !== undefined) parts.push(depth === 'full' ? `38;2;${colour.join(';')}` : `38;5;${nearestOf256(colour)}`);
  return parts.join(';');
}

/** Levels of the 6 x 6 x 6 cube that takes indices 16 to 231 of the 256 colours (xterm's, in general use). */
const LEVELS = [0, 95, 135, 175, 215, 255] as const;

function nearestOf256([red, green, blue]: Rgb): number {
  return 16 + 36 * nearestLevel(red) + 6 * nearestLevel(green) + nearestLevel(blue);
}

function nearestLevel(value: number): number {
  let best = 0;
  LEVELS.forEach((level, i) => {
    if (Math.abs(level - value) < Math.abs((LEVELS[best] ?? 0) - value)) best = i;
  });
  return best;
}
