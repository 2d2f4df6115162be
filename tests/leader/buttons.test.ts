import { describe, expect, it } from 'vitest';
import { buttons } from '../../src/leader/buttons.ts';
import type { ButtonDuty, ButtonSpec } from '../../src/leader/spec.ts';

const SPAN = 1000;
const below: ButtonSpec = { name: 'pedal', input: 0, pressed: 'below', counts: 300, does: 'mark' };

/** What one button says to each reading: `+` pressed by it, `-` let go by it, `1` held, `0` not. */
function says(does: ButtonDuty, counts: readonly number[], spec: ButtonSpec = below): string {
  const pad = buttons([{ ...spec, does }], SPAN);
  return counts
    .map((value) => {
      pad.push(Float64Array.of(value));
      return pad.edge[0] === 1 ? '+' : pad.edge[0] === -1 ? '-' : `${pad.down[0]}`;
    })
    .join('');
}

describe('a button', () => {
  it('is pressed below its counts', () => {
    expect(says('mark', [500, 300, 299, 299, 299])).toBe('000+1');
  });

  it('is pressed above them where it is wired so', () => {
    expect(says('mark', [0, 300, 301, 301, 100, 100], { ...below, pressed: 'above' })).toBe('000+1-');
  });

  it('is let go only 2 % of the span past its counts, so that noise at the threshold does not chatter', () => {
    // By hand: 2 % of 1000 counts are 20.
    expect(says('mark', [299, 299, 305, 319, 305, 319])).toBe('0+1111');
    expect(says('mark', [299, 299, 320, 320])).toBe('0+1-');
  });

  it('keeps its state while it is not heard', () => {
    const gap = Number.NaN;
    expect(says('mark', [100, 100, gap, gap, 100])).toBe('0+111');
    expect(says('stop', [500, gap, gap])).toBe('000');
  });

  it('that counts one reading of each state does nothing', () => {
    expect(says('mark', [100, 500, 100, 500, 100])).toBe('00000');
  });
});

describe('what stops an arm acts on one reading, what moves it needs two', () => {
  it.each<[ButtonDuty, string]>([
    ['stop', '+11-0'],
    ['hold', '+11-0'],
    ['enable', '0+-00'],
    ['clutch', '0+1-0'],
    ['join', '0+1-0'],
    ['mark', '0+1-0'],
  ])('%s', (does, said) => {
    expect(says(does, [100, 100, 900, 900, 900])).toBe(said);
  });

  it('an enable button that is not heard is not held', () => {
    expect(says('enable', [100, 100, 100, Number.NaN, 100, 100])).toBe('0+1-0+');
  });
});

describe('buttons', () => {
  it('are apart from each other', () => {
    const pads = buttons([below, { ...below, does: 'stop' }], SPAN);
    pads.push(Float64Array.of(900, 100));
    expect([...pads.down]).toEqual([0, 1]);
    pads.push(Float64Array.of(100, 100));
    pads.push(Float64Array.of(100, 900));
    expect([...pads.down]).toEqual([1, 1]);
    expect([...pads.edge]).toEqual([1, 0]);
  });
});
