import { describe, expect, it } from 'vitest';
import { motionFaults } from '../motion-laws.ts';
import { button, DEG, followerJoint, followerSpec, leaderSpec, MS, planOf, PRESSED, RELEASED, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const plain = planOf([followerSpec()]);
const still = (on: Rehearsal): boolean => on.speedsDegS().every((v) => v === 0);
const swing = (tS: number): number[] => [30 * Math.sin(2 * tS), 20 * Math.sin(3 * tS)];

/** A plan whose leader has one button, on input 2. */
function withButton(does: Parameters<typeof button>[1]): ReturnType<typeof planOf> {
  return planOf([followerSpec()], { leader: leaderSpec(2, { buttons: [button(2, does)] }) });
}

describe('hold', () => {
  it('brakes inside the limits and keeps the pulses; join goes on, gently', () => {
    const on = new Rehearsal(plain)
      .following()
      .plays(1.3 * S, swing)
      .key('hold');
    expect(still(on)).toBe(false);
    on.plays(S, swing);
    expect([on.state(), still(on)]).toEqual(['holding', true]);
    const stood = on.anglesDeg();
    on.plays(S, swing);
    expect(on.anglesDeg()).toEqual(stood);
    expect(on.commands(0, on.nowUs - S).length).toBeGreaterThan(10);
    on.key('join');
    expect(on.state()).toBe('joining');
    on.plays(4 * S, () => [10, 10]);
    expect(on.state()).toBe('following');
    expect(motionFaults(on.commands(), on.drive.plan.followers[0]?.joints ?? [])).toEqual([]);
  });

  it('of one follower leaves the others alone', () => {
    const on = new Rehearsal(planOf([followerSpec(), followerSpec()]))
      .following()
      .key('hold', 1)
      .plays(S, () => [20, 20]);
    expect([on.state(0), on.state(1)]).toEqual(['following', 'holding']);
    expect(on.anglesDeg(0)[0]).toBeCloseTo(20, 6);
    expect(on.anglesDeg(1)).toEqual([0, 0]);
  });

  it('lasts as long as its button is held', () => {
    const on = new Rehearsal(withButton('hold'))
      .following()
      .input(2, PRESSED)
      .plays(20 * MS);
    expect(on.state()).toBe('holding');
    on.key('join').plays(S, () => [30, 30]);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', 0, 0]);
    on.input(2, RELEASED).plays(30 * MS);
    expect(on.state()).toBe('joining');
  });
});

describe('an enable button', () => {
  it('keeps every arm still until it is held', () => {
    const on = new Rehearsal(withButton('enable')).ready().plays(2 * S, () => [30, 30]);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', 0, 0]);
    on.input(2, PRESSED).plays(4 * S, () => [30, 30]);
    expect(on.state()).toBe('following');
  });

  it('lets go of them at the first reading that does not have it held, or does not have it at all', () => {
    for (const let_go of [RELEASED, Number.NaN]) {
      const on = new Rehearsal(withButton('enable')).input(2, PRESSED).following();
      on.plays(20 * MS)
        .input(2, let_go)
        .reads();
      expect(on.state()).toBe('holding');
      on.input(2, PRESSED).plays(4 * S);
      expect(on.state()).toBe('following');
    }
  });

  it('comes before park, which waits for it', () => {
    const on = new Rehearsal(withButton('enable'))
      .input(2, PRESSED)
      .following()
      .plays(2 * S, () => [40, 0]);
    on.input(2, RELEASED).plays(S).key('park').plays(S);
    expect([on.state(), on.anglesDeg()[0]]).toEqual(['holding', expect.closeTo(40, 6)]);
  });
});

describe('the clutch', () => {
  it('lets go and takes hold without a jump, and its offset stays until the arm parks', () => {
    const on = new Rehearsal(plain).following().plays(2 * S, () => [10, 10]);
    on.key('clutch').plays(2 * S, () => [50, -30]);
    expect(on.anglesDeg()).toEqual([expect.closeTo(10, 9), expect.closeTo(10, 9)]);
    expect(on.state()).toBe('following');
    on.key('clutch').plays(S, () => [50, -30]);
    expect(on.anglesDeg()).toEqual([expect.closeTo(10, 9), expect.closeTo(10, 9)]);
    on.plays(S, () => [55, -30]);
    expect(on.anglesDeg()).toEqual([expect.closeTo(15, 9), expect.closeTo(10, 9)]);
    on.key('park')
      .plays(6 * S)
      .key('join')
      .plays(4 * S, () => [20, 20]);
    expect(on.anglesDeg()).toEqual([expect.closeTo(20, 9), expect.closeTo(20, 9)]);
  });

  it('offset ends with a stop, and so does the clutch', () => {
    const on = new Rehearsal(plain)
      .following()
      .key('clutch')
      .plays(S, () => [30, 30])
      .key('stop')
      .plays(S, () => [30, 30]);
    expect(on.stage().is.clutched).toBe(false);
    on.key('rearm')
      .key('join')
      .plays(4 * S, () => [30, 30]);
    expect(on.anglesDeg()).toEqual([expect.closeTo(30, 9), expect.closeTo(30, 9)]);
  });

  it('is out while its button is held, for all', () => {
    const on = new Rehearsal(withButton('clutch'))
      .following()
      .input(2, PRESSED)
      .plays(20 * MS)
      .plays(S, () => [30, 30]);
    expect(on.anglesDeg()).toEqual([0, 0]);
    on.input(2, RELEASED).plays(S, () => [30, 30]);
    expect(on.anglesDeg()).toEqual([0, 0]);
    on.plays(S, () => [40, 30]);
    expect(on.anglesDeg()).toEqual([expect.closeTo(10, 9), expect.closeTo(0, 9)]);
  });

  it('offset comes before the range', () => {
    const joints = [followerJoint(0, { maxRad: 20 * DEG })];
    const on = new Rehearsal(planOf([followerSpec(joints)]))
      .following()
      .key('clutch')
      .plays(S, () => [-30]);
    on.key('clutch').plays(2 * S, () => [20]);
    expect(on.anglesDeg()[0]).toBeCloseTo(20, 9);
    on.plays(S, () => [-10]);
    expect(on.anglesDeg()[0]).toBeCloseTo(20, 9);
    on.plays(S, () => [-20]);
    expect(on.anglesDeg()[0]).toBeCloseTo(10, 9);
  });
});

describe('the pace', () => {
  const fastestDegS = (on: Rehearsal, pace: number): number => {
    const fromUs = on.nowUs + 0.5 * S;
    on.key('pace', 0, pace);
    let most = 0;
    on.plays(1.5 * S, (tS) => {
      if (on.nowUs >= fromUs) most = Math.max(most, ...on.speedsDegS().map(Math.abs));
      return [tS < 0.75 ? 85 : -85, 0];
    });
    return most;
  };

  it('scales every speed limit while it runs', () => {
    const on = new Rehearsal(plain).following().plays(S);
    expect(fastestDegS(on, 1)).toBeCloseTo(60, 6);
    expect(fastestDegS(on, 0.5)).toBeCloseTo(30, 6);
    expect(fastestDegS(on, 0.1)).toBeCloseTo(6, 6);
  });

  it('of nought lets nothing move, and never makes an arm faster than its profile', () => {
    const on = new Rehearsal(plain).following().plays(S);
    expect(fastestDegS(on, 0)).toBeCloseTo(0, 9);
    expect(fastestDegS(on, 3)).toBeCloseTo(60, 6);
    expect(fastestDegS(on, -1)).toBeCloseTo(0, 9);
  });

  it('that is no number changes nothing', () => {
    const on = new Rehearsal(plain).following().plays(S);
    expect(fastestDegS(on, Number.NaN)).toBeCloseTo(60, 6);
  });
});

describe('park', () => {
  it('goes home gently, and then holds until join', () => {
    const on = new Rehearsal(plain)
      .following()
      .plays(2 * S, () => [40, -20])
      .key('park')
      .plays(S, () => [40, -20]);
    expect(on.state()).toBe('parking');
    expect(Math.max(...on.speedsDegS().map(Math.abs))).toBeCloseTo(15, 6);
    on.plays(4 * S, () => [40, -20]);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', 0, 0]);
    on.key('join').plays(4 * S, () => [40, -20]);
    expect(on.state()).toBe('following');
  });

  it('works without a leader, if contact was lost before it was asked for', () => {
    const on = new Rehearsal(plain)
      .following()
      .plays(2 * S, () => [40, -20])
      .run(S);
    expect(on.state()).toBe('holding');
    on.key('park').run(5 * S);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', 0, 0]);
  });

  it('is broken off when contact is lost on the way, and does not turn into following when it is back', () => {
    const on = new Rehearsal(plain)
      .following()
      .plays(2 * S, () => [40, -20])
      .key('park')
      .plays(0.5 * S)
      .run(S);
    expect([on.state(), still(on)]).toEqual(['holding', true]);
    const stood = on.anglesDeg();
    on.plays(2 * S, () => [-40, 20]);
    expect([on.state(), ...on.anglesDeg()]).toEqual(['holding', ...stood]);
  });

  it('can be turned back by join', () => {
    const on = new Rehearsal(plain)
      .following()
      .plays(2 * S, () => [40, -20])
      .key('park')
      .plays(0.5 * S, () => [40, -20]);
    on.key('join').plays(4 * S, () => [40, -20]);
    expect(on.state()).toBe('following');
  });
});

describe('limp', () => {
  it('parks first, then ends the pulses, and only go wakes it', () => {
    const on = new Rehearsal(plain)
      .following()
      .plays(2 * S, () => [40, -20])
      .key('limp')
      .plays(5 * S, () => [40, -20]);
    expect(on.state()).toBe('limp');
    expect(on.anglesDeg()).toEqual([0, 0]);
    expect(on.told.at(-1)?.kind).toBe('limp');
    const told = on.told.length;
    on.key('join')
      .key('park')
      .key('hold')
      .plays(2 * S, () => [40, -20]);
    expect([on.state(), on.told.length]).toEqual(['limp', told]);
    on.key('go').plays(S);
    expect(on.told.slice(told, told + 2).map((each) => each.pulsing)).toEqual([1, 2]);
  });

  it('comes at once where it stands at rest', () => {
    const on = new Rehearsal(plain)
      .following()
      .key('hold')
      .plays(S)
      .key('limp')
      .run(20 * MS);
    expect([on.state(), on.told.at(-1)?.kind]).toEqual(['limp', 'limp']);
  });
});

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
    expect(on.told.map((told) => told.kind)).toEqual(
      ['power_off', 'power_on', 'move', 'power_off', 'limp'].slice(on.told[0]?.kind === 'power_off' ? 0 : 1),
    );
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
    const on = new Rehearsal(withButton('stop')).following().plays(0.5 * S, swing);
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
