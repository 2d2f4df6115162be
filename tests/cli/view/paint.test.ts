import { describe, expect, it } from 'vitest';
import { span } from '../../../src/cli/view/layout.ts';
import { depthOf, paintFor } from '../../../src/cli/view/paint.ts';
import { shapesFor, STATE_TONES } from '../../../src/cli/view/shapes.ts';
import { STATES } from '../../../src/follower/states.ts';

describe('Colours', () => {
  it('are those of Okabe and Ito (Color Universal Design, 2008), where the terminal shows them all', () => {
    const paint = paintFor('full');
    // Their table in 8 bits: bluish green 0, 158, 115; sky blue 86, 180, 233; vermillion 213, 94, 0.
    expect(paint([span('following', 'good')])).toBe('\x1b[38;2;0;158;115mfollowing\x1b[0m');
    expect(paint([span('joining', 'moving')])).toBe('\x1b[38;2;86;180;233mjoining\x1b[0m');
    expect(paint([span('stopped', 'bad')])).toBe('\x1b[1;38;2;213;94;0mstopped\x1b[0m');
  });

  it('are the nearest of 256 where it shows no more', () => {
    // The cube's levels are 0, 95, 135, 175, 215, 255. Orange 230, 159, 0: 215 (4), 175 (3), 0 (0): 16 + 144 + 18 = 178.
    expect(paintFor('256')([span('holding', 'held')])).toBe('\x1b[38;5;178mholding\x1b[0m');
    // Reddish purple 204, 121, 167: 215 (4), 135 (2), 175 (3): 16 + 144 + 12 + 3 = 175.
    expect(paintFor('256')([span('limp', 'off')])).toBe('\x1b[38;5;175mlimp\x1b[0m');
  });

  it('are left out where there are none, while weight stays', () => {
    const paint = paintFor('none');
    expect(paint([span('following', 'good'), span(' wren', 'strong')])).toBe('following\x1b[1m wren\x1b[0m');
  });

  it('are switched once for neighbours of one tone', () => {
    const line = [span('a', 'dim'), span(''), span('b', 'dim'), span('c', 'strong'), span('d')];
    expect(paintFor('none')(line)).toBe('\x1b[2mab\x1b[0m\x1b[1mc\x1b[0md');
  });

  it('follow what the terminal says of itself, and NO_COLOR above all', () => {
    expect(depthOf({ TERM: 'xterm-256color', COLORTERM: 'truecolor' })).toBe('full');
    expect(depthOf({ TERM: 'xterm-256color' })).toBe('256');
    expect(depthOf({ TERM: 'vt100' })).toBe(process.platform === 'win32' ? '256' : 'none');
    expect(depthOf({ TERM: 'xterm-256color', COLORTERM: 'truecolor', NO_COLOR: '1' })).toBe('none');
    expect(depthOf({ TERM: 'xterm-256color', NO_COLOR: '' })).toBe('256');
  });
});

describe.each([
  ['drawn', { LANG: 'de_DE.UTF-8' }],
  ['typed', { LANG: 'C' }],
])('%s shapes', (_, env) => {
  const shapes = shapesFor(env);

  it('tell every state apart without colour', () => {
    expect(new Set(Object.values(shapes.states)).size).toBe(STATES.length);
  });

  it('are one column wide', () => {
    for (const shape of [...Object.values(shapes.states), shapes.bar, shapes.angle, shapes.target, shapes.both])
      expect(shape).toHaveLength(1);
  });

  it('stand beside a tone of their own', () => {
    expect(Object.keys(STATE_TONES).sort()).toEqual([...STATES].sort());
  });
});

describe('Shapes', () => {
  it.skipIf(process.platform === 'win32')('are typed where the character set has no drawn ones', () => {
    expect(shapesFor({ LANG: 'de_DE.UTF-8', LC_ALL: 'C' }).angle).toBe('O');
    expect(shapesFor({}).bar).toBe('-');
    expect(shapesFor({ LC_CTYPE: 'C.utf8' }).angle).toBe('●');
  });
});
