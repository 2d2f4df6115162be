import { describe, expect, it } from 'vitest';
import { DEG, followerSpec, MS, planOf, S } from '../plans.ts';
import { Rehearsal, type Told } from './rehearsal.ts';

const plain = planOf([followerSpec()]);

/** An arm that stands at 10 and 20 degrees and is held there. */
function held(): Rehearsal {
  const on = new Rehearsal(plain)
    .following()
    .plays(2 * S, () => [10, 20])
    .key('hold');
  return on.plays(0.5 * S, () => [10, 20]);
}

const pulse = (on: Rehearsal, servo: number): number => on.told.at(-1)?.pulsesUs[servo] as number;
/** By hand: 1500 + angle * 1880 / 180. */
const home = [1500 + (10 * 1880) / 180, 1500 + (20 * 1880) / 180] as const;

/** Fastest change of a servo's pulse, us/s, from one command to the next. */
function fastestUsS(told: readonly Told[], servo: number): number {
  let most = 0;
  for (let i = 1; i < told.length; i++) {
    const [a, b] = [told[i - 1] as Told, told[i] as Told];
    const change = Math.abs((b.pulsesUs[servo] as number) - (a.pulsesUs[servo] as number));
    most = Math.max(most, change / ((b.tUs - a.tUs) / S));
  }
  return most;
}

describe('a jog', () => {
  it('moves one servo by pulse at 100 us a second, and nothing else', () => {
    const on = held();
    const fromUs = on.nowUs;
    on.jog(0, 1800).plays(S, () => [10, 20]);
    expect(on.state()).toBe('jogging');
    expect(pulse(on, 0)).toBeCloseTo(home[0] + 100, 0);
    on.plays(2 * S, () => [10, 20]);
    expect(pulse(on, 0)).toBeCloseTo(1800, 9);
    expect(pulse(on, 1)).toBeCloseTo(home[1], 6);
    expect(fastestUsS(on.commands(0, fromUs), 0)).toBeLessThanOrEqual(100 + 1e-6);
  });

  it('returns its servo home as slowly, and the arm then holds until join', () => {
    const on = held()
      .jog(0, 1650)
      .plays(S, () => [10, 20]);
    const fromUs = on.nowUs;
    on.jog(0, Number.NaN).plays(S, () => [10, 20]);
    expect(on.state()).toBe('holding');
    expect(pulse(on, 0)).toBeCloseTo(home[0], 6);
    expect(fastestUsS(on.commands(0, fromUs), 0)).toBeLessThanOrEqual(100 + 1e-6);
    on.plays(S, () => [40, 40]);
    expect(on.state()).toBe('holding');
    on.key('join').plays(3 * S, () => [10, 20]);
    expect(on.state()).toBe('following');
  });

  it('starts from where the arm is now, not from where the last one ended', () => {
    const on = held()
      .jog(0, 1650)
      .plays(S, () => [10, 20]);
    on.jog(0, Number.NaN).plays(2 * S, () => [10, 20]);
    on.key('join').plays(5 * S, () => [-30, 20]);
    on.key('hold').plays(S, () => [-30, 20]);
    const fromUs = on.nowUs - 0.1 * S;
    on.jog(0, 1800).plays(S, () => [-30, 20]);
    expect(fastestUsS(on.commands(0, fromUs), 0)).toBeLessThanOrEqual(100 + 1e-6);
  });

  it('refuses another servo until the first is home', () => {
    const on = held()
      .jog(0, 1650)
      .plays(S, () => [10, 20])
      .jog(1, 1900)
      .plays(S, () => [10, 20]);
    expect(pulse(on, 1)).toBeCloseTo(home[1], 6);
    on.jog(0, Number.NaN)
      .plays(S, () => [10, 20])
      .jog(1, 1800)
      .plays(2 * S, () => [10, 20]);
    expect(pulse(on, 1)).toBeCloseTo(1800, 6);
    expect(pulse(on, 0)).toBeCloseTo(home[0], 6);
  });

  it('is only for an arm that holds, and for a servo it has', () => {
    const on = new Rehearsal(plain).following().jog(0, 1800).plays(S);
    expect([on.state(), pulse(on, 0)]).toEqual(['following', 1500]);
    const other = held()
      .jog(2, 1800)
      .jog(-1, 1800)
      .jog(0.5, 1800)
      .plays(S, () => [10, 20]);
    expect(other.state()).toBe('holding');
    expect(other.jog(0, Number.NaN).state()).toBe('holding');
  });

  it('takes a new pulse on the way', () => {
    const on = held()
      .jog(0, 2400)
      .plays(0.5 * S, () => [10, 20])
      .jog(0, 1600)
      .plays(S, () => [10, 20]);
    expect(pulse(on, 0)).toBeCloseTo(1600, 9);
  });

  it('stays where it is when the operator presses hold', () => {
    const on = held()
      .jog(0, 2400)
      .plays(0.5 * S, () => [10, 20])
      .key('hold')
      .plays(20 * MS, () => [10, 20]);
    const stood = pulse(on, 0);
    on.plays(S, () => [10, 20]);
    expect([on.state(), pulse(on, 0)]).toEqual(['jogging', stood]);
    on.jog(0, Number.NaN).plays(2 * S, () => [10, 20]);
    expect([on.state(), pulse(on, 0)]).toEqual(['holding', expect.closeTo(home[0], 6)]);
  });

  it('leaves its servo where it is when it is stopped: nothing snaps home', () => {
    const on = held()
      .jog(0, 2000)
      .plays(2 * S, () => [10, 20]);
    const stood = pulse(on, 0);
    const before = on.told.length;
    on.key('stop').plays(2 * S, () => [10, 20]);
    expect(on.state()).toBe('stopped');
    expect(on.told.slice(before).filter((told) => told.pulsesUs[0] !== stood)).toEqual([]);
    on.key('rearm').plays(S, () => [10, 20]);
    expect(on.told.slice(before).filter((told) => told.pulsesUs[0] !== stood)).toEqual([]);
    expect(on.state()).toBe('waking');
  });

  it('does not snap home after a blocked port either', () => {
    const on = held()
      .jog(0, 2400)
      .plays(S, () => [10, 20]);
    const fromUs = on.nowUs;
    on.board('blocked')
      .run(0.5 * S)
      .board('free')
      .plays(S, () => [10, 20]);
    expect(fastestUsS(on.commands(0, fromUs), 0)).toBeLessThanOrEqual(100 + 1e-6);
    expect(on.state()).toBe('jogging');
  });

  it('that a lost port broke off lets any servo be jogged afterwards', () => {
    const on = held()
      .jog(0, 2000)
      .plays(S, () => [10, 20])
      .board('down')
      .plays(0.2 * S)
      .board('ready', 0, true);
    expect(on.state()).toBe('waking');
    on.key('go')
      .plays(5 * S, () => [10, 20])
      .key('hold')
      .plays(S, () => [10, 20]);
    on.jog(1, 1800).plays(2 * S, () => [10, 20]);
    expect([pulse(on, 0), pulse(on, 1)]).toEqual([expect.closeTo(home[0], 6), expect.closeTo(1800, 6)]);
  });

  it('goes on without a leader', () => {
    const on = held()
      .jog(0, 1700)
      .run(3 * S);
    expect([on.state(), pulse(on, 0)]).toEqual(['jogging', expect.closeTo(1700, 9)]);
  });

  it('says angles that are the joints’, whatever the pulse is', () => {
    const on = held()
      .jog(0, 1700)
      .plays(3 * S, () => [10, 20]);
    expect(on.told.at(-1)?.anglesRad[0]).toBeCloseTo(10 * DEG, 9);
  });
});
