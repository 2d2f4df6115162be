import { describe, expect, it } from 'vitest';
import { operator } from '../../src/cli/operator.ts';
import { ALL, type Key } from '../../src/drive/events.ts';

function at(keyboard: { followers?: number; awake?: boolean; pace?: number } = {}) {
  const asked: (readonly [Key, number] | readonly [Key, number, number])[] = [];
  const left: string[] = [];
  const companions: string[] = [];
  const state = { pace: keyboard.pace ?? 1, awake: keyboard.awake ?? true };
  const hand = operator(keyboard.followers ?? 3, {
    key(key, follower, value) {
      asked.push(key === 'pace' ? [key, follower, value] : [key, follower]);
      if (key === 'pace') state.pace = value;
    },
    companion: (key) => void companions.push(key),
    pace: () => state.pace,
    awake: () => state.awake,
    leave: (why) => left.push(why),
  });
  const press = (...keys: Exclude<Key, 'pace' | 'mark'>[]): void => {
    for (const key of keys) hand.act({ kind: 'ask', key });
  };
  return { hand, asked, left, press, companions };
}

describe('Keys of a take', () => {
  it('go to what goes along with the run, and to no arm', () => {
    const { hand, asked, companions } = at();
    hand.act({ kind: 'companion', key: 'mark' });
    hand.act({ kind: 'companion', key: 'record' });
    expect([asked, companions]).toEqual([[], ['mark', 'record']]);
  });
});

describe('Keys', () => {
  it('are for every follower until some are selected', () => {
    const { asked, press } = at();
    press('hold');
    expect(asked).toEqual([['hold', ALL]]);
  });

  it('are for one follower once its digit is pressed, and more digits add and take away', () => {
    const { hand, asked, press } = at();
    hand.act({ kind: 'select', follower: 1 });
    press('go');
    hand.act({ kind: 'select', follower: 2 });
    press('hold');
    hand.act({ kind: 'select', follower: 1 });
    press('park');
    expect(asked).toEqual([
      ['go', 1],
      ['hold', 1],
      ['hold', 2],
      ['park', 2],
    ]);
  });

  it('are for all again when the last one is taken away, or all are asked for', () => {
    const { hand, asked, press } = at();
    hand.act({ kind: 'select', follower: 1 });
    hand.act({ kind: 'select', follower: 1 });
    press('hold');
    hand.act({ kind: 'select', follower: 0 });
    hand.act({ kind: 'select_all' });
    press('join');
    expect(asked).toEqual([
      ['hold', ALL],
      ['join', ALL],
    ]);
  });

  it('stop all, whichever is selected', () => {
    const { hand, asked, press } = at();
    hand.act({ kind: 'select', follower: 0 });
    press('stop');
    expect(asked).toEqual([['stop', ALL]]);
  });

  it('step the pace through 10, 25, 50 and 100 %, from wherever it is', () => {
    const { hand, asked } = at({ pace: 0.4 });
    for (const step of [1, 1, 1, -1, -1, -1, -1] as const) hand.act({ kind: 'pace', step });
    expect(asked.map((each) => each[2])).toEqual([0.5, 1, 0.5, 0.25, 0.1]);
  });
});

describe('Ctrl-C', () => {
  it('first makes every follower hold, whichever is selected, and offers to park', () => {
    const { hand, asked, left, press } = at();
    hand.act({ kind: 'select', follower: 0 });
    hand.interrupt();
    expect(asked).toEqual([['hold', ALL]]);
    expect(hand.is.asked).toBe('interrupted');
    press('park');
    expect(asked.at(-1)).toEqual(['park', ALL]);
    expect(left).toEqual([]);
  });

  it('a second time leaves', () => {
    const { hand, left } = at();
    hand.interrupt();
    hand.act({ kind: 'interrupt' });
    expect(left).toEqual(['interrupted']);
  });

  it.each(['join', 'go', 'park', 'limp'] as const)('is a first one again after %s', (key) => {
    const { hand, asked, left, press } = at();
    hand.interrupt();
    press(key);
    hand.interrupt();
    expect(left).toEqual([]);
    expect(asked.at(-1)).toEqual(['hold', ALL]);
  });

  it.each(['hold', 'stop', 'rearm', 'clutch'] as const)('stays a second one after %s, which moves nothing', (key) => {
    const { hand, left, press } = at();
    hand.interrupt();
    press(key);
    hand.interrupt();
    expect(left).toEqual(['interrupted']);
  });

  it('closes the help page, which would hide the question', () => {
    const { hand } = at();
    hand.act({ kind: 'help' });
    hand.interrupt();
    expect(hand.is.help).toBe(false);
  });

  it('breaks off parking to leave', () => {
    const { hand, asked, left } = at();
    hand.parkAndLeave();
    hand.interrupt();
    expect(asked).toEqual([
      ['park', ALL],
      ['hold', ALL],
    ]);
    expect(hand.is.asked).toBe('interrupted');
    expect(left).toEqual([]);
  });
});

describe('Leaving', () => {
  it('asks while an arm has pulses, and leaves on the second press', () => {
    const { hand, asked, left } = at();
    hand.act({ kind: 'quit' });
    expect(asked).toEqual([['hold', ALL]]);
    expect(left).toEqual([]);
    hand.act({ kind: 'quit' });
    expect(left).toEqual(['quit']);
  });

  it('parks first when that is chosen', () => {
    const { hand, asked, press } = at();
    hand.act({ kind: 'quit' });
    press('park');
    expect(asked.at(-1)).toEqual(['park', ALL]);
    expect(hand.is.asked).toBe('parking');
  });

  it('does not ask when no arm is awake', () => {
    const { hand, asked, left } = at({ awake: false });
    hand.act({ kind: 'quit' });
    expect(left).toEqual(['quit']);
    expect(asked).toEqual([]);
  });

  it.each(['hold', 'join', 'stop'] as const)('is given up by %s', (key) => {
    const { hand, press } = at();
    hand.parkAndLeave();
    press(key);
    expect(hand.is.asked).toBeNull();
  });

  it('is given up by Escape where it is only a question', () => {
    const { hand } = at();
    hand.act({ kind: 'quit' });
    hand.act({ kind: 'back' });
    expect(hand.is.asked).toBeNull();
    hand.parkAndLeave();
    hand.act({ kind: 'back' });
    expect(hand.is.asked).toBe('parking');
  });
});

describe('The cautions', () => {
  it('are due until a key lets an arm move', () => {
    const { hand, press } = at();
    press('hold', 'stop', 'rearm');
    expect(hand.is.untouched).toBe(true);
    press('go');
    expect(hand.is.untouched).toBe(false);
  });
});
