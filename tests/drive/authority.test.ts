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
