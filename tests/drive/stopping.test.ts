import { describe, expect, it } from 'vitest';
import { motionFaults } from '../motion-laws.ts';
import { button, followerSpec, leaderSpec, MS, planOf, PRESSED, RELEASED, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const swing = (tS: number): number[] => [30 * Math.sin(2 * tS), 20 * Math.sin(3 * tS)];
const still = (on: Rehearsal): boolean => on.speedsDegS().every((v) => v === 0);

/** A plan whose leader has a stop button, on input 2. */
const stoppable = planOf([followerSpec()], { leader: leaderSpec(2, { buttons: [button(2, 'stop')] }) });

describe('stop', () => {
  const category = (stopCategory: 0 | 1 | 2): Rehearsal =>
    new Rehearsal(planOf([followerSpec(undefined, { stopCategory, hasPower: stopCategory !== 2 })]))
      .following()
      .plays(1.3 * S, swing);

  it('of category 2 brakes inside the limits, holds and keeps its pulses', () => {
    const on = category(2).key('stop');
    expect([on.state(), still(on)]).toEqual(['stopped', false]);
    on.plays(S, swing);
    expect(still(on)).toBe(true);
    expect(new Set(on.told.map((told) => told.kind))).toEqual(new Set(['move']));
    expect(motionFaults(on.commands(), on.drive.plan.followers[0]?.joints ?? [])).toEqual([]);
    expect(on.commands(0, on.nowUs - 0.5 * S).length).toBeGreaterThan(5);
  });

  it('of category 0 takes the power away at once, then ends the pulses, and says no angle any more', () => {
    const on = category(0);
    const before = on.told.length;
    on.key('stop').plays(2 * S, swing);
    expect(on.told.slice(before).map((told) => told.kind)).toEqual(['power_off', 'limp']);
    expect(on.told[before]?.tUs).toBe(on.nowUs - 2 * S);
  });

  it('of category 1 brakes first, then takes the power away and ends the pulses', () => {
    const on = category(1);
    const before = on.told.length;
    on.key('stop').plays(2 * S, swing);
    const kinds = on.told.slice(before).map((told) => told.kind);
    expect(kinds.slice(-2)).toEqual(['power_off', 'limp']);
    expect(kinds.slice(0, -2).every((kind) => kind === 'move')).toBe(true);
    expect(kinds.length).toBeGreaterThan(3);
    const moves = on.commands().filter((told) => told.kind === 'move' && told.pulsing === 2);
    expect(motionFaults(moves, on.drive.plan.followers[0]?.joints ?? [])).toEqual([]);
  });

  it.each([0, 1] as const)('of category %s in the midst of waking takes the power away at once', (stopCategory) => {
    const plan = planOf([followerSpec(undefined, { stopCategory, hasPower: true })]);
    const on = new Rehearsal(plan)
      .ready()
      .run(50 * MS)
      .key('stop')
      .run(S);
    expect(on.told.map((told) => told.kind)).toEqual(['power_on', 'move', 'power_off', 'limp']);
    expect(on.state()).toBe('stopped');
  });

  it('latches: nothing moves until rearm and then join, whatever else is pressed', () => {
    const on = category(2).key('stop').plays(S, swing);
    const stood = on.anglesDeg();
    for (const key of ['go', 'join', 'park', 'hold', 'limp', 'clutch'] as const) on.key(key).plays(0.3 * S, swing);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['stopped', ...stood]);
    on.key('rearm').plays(S, swing);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', ...stood]);
    on.key('join').plays(5 * S, () => [10, 10]);
    expect(on.state()).toBe('following');
  });

  it('is not rearmed before the arm stands', () => {
    const on = category(2).key('stop').key('rearm');
    expect(on.state()).toBe('stopped');
    on.plays(S, swing).key('rearm');
    expect(on.state()).toBe('holding');
  });

  it.each([0, 1] as const)('of category %s wakes again only by rearm and go, with power on first', (stopCategory) => {
    const on = category(stopCategory)
      .key('stop')
      .plays(2 * S, swing)
      .key('rearm')
      .plays(S, swing);
    expect(on.state()).toBe('waking');
    const before = on.told.length;
    on.key('go').plays(0.3 * S, swing);
    expect(on.told.slice(before, before + 3).map((told) => told.kind)).toEqual(['power_on', 'move', 'move']);
  });

  it('by its button acts on one reading, before that reading can move anything', () => {
    const on = new Rehearsal(stoppable).following().plays(0.5 * S, swing);
    const before = on.told.length;
    on.input(2, PRESSED).pose(60, 60).reads();
    expect(on.state()).toBe('stopped');
    on.plays(S, () => [60, 60]);
    expect(on.told.slice(before).every((told) => told.state === 'stopped')).toBe(true);
  });
});

/** Everything that can keep an arm from following, strongest first, and what undoes it. */
describe('precedence: stop, lost contact, enable, hold, park, clutch, follow', () => {
  const all = planOf([followerSpec()], {
    leader: leaderSpec(2, { buttons: [button(2, 'enable'), button(3, 'hold'), button(4, 'clutch')] }),
  });

  it('what is left shows as each stronger one is taken away', () => {
    const on = new Rehearsal(all)
      .input(2, PRESSED)
      .following()
      .plays(2 * S, () => [40, 40]);
    on.input(4, PRESSED)
      .plays(30 * MS, () => [40, 40])
      .key('park')
      .plays(30 * MS, () => [40, 40]);
    expect(on.state()).toBe('parking');
    on.input(3, PRESSED).plays(30 * MS, () => [40, 40]);
    on.input(2, RELEASED).plays(30 * MS, () => [40, 40]);
    on.run(S);
    on.key('stop').run(S);
    expect([on.state(), on.stage().is.blocks]).toEqual(['stopped', expect.any(Number)]);

    const blocked = (): string => `${on.state()} ${blockNames(on).join(' ')}`;
    expect(blocked()).toBe('stopped stale enable pedal held');
    on.key('rearm');
    expect(blocked()).toBe('holding stale enable pedal held');
    on.key('join');
    expect(blocked()).toBe('holding stale enable pedal');
    on.plays(30 * MS, () => [40, 40]);
    expect(blocked()).toBe('holding enable pedal');
    on.input(2, PRESSED).plays(30 * MS, () => [40, 40]);
    expect(blocked()).toBe('holding pedal');
    on.input(3, RELEASED).plays(30 * MS, () => [40, 40]);
    expect([on.state(), on.stage().is.clutched]).toEqual(['following', true]);
    const stood = on.anglesDeg();
    on.plays(2 * S, () => [-40, -40]);
    expect(on.anglesDeg()).toEqual(stood.map((deg) => expect.closeTo(deg, 6) as number));
    on.input(4, RELEASED)
      .plays(S, () => [-40, -40])
      .plays(2 * S, () => [-30, -40]);
    expect(on.anglesDeg()[0]).toBeCloseTo((stood[0] as number) + 10, 6);
  });
});

function blockNames(on: Rehearsal): string[] {
  const order = ['stale', 'contact', 'enable', 'pedal', 'held', 'fault'] as const;
  const bits = { stale: 1, enable: 2, held: 4, contact: 8, pedal: 16, fault: 32 };
  return order.filter((name) => (on.stage().is.blocks & bits[name]) !== 0);
}
