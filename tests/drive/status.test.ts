import { describe, expect, it } from 'vitest';
import { driveStatus } from '../../src/drive/status.ts';
import { button, DEG, followerJoint, followerSpec, leaderSpec, MS, planOf, PRESSED, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

const plan = planOf(
  [followerSpec([followerJoint(0, { maxRad: 20 * DEG }), followerJoint(1, { deadbandRad: 2 * DEG })])],
  {
    leader: leaderSpec(2, { buttons: [button(2, 'enable')] }),
  },
);

describe('the status of a drive', () => {
  it('says what is not known yet as null, not as a number', () => {
    const status = driveStatus(new Rehearsal(plan).key('mark').drive, 5 * S);
    expect(status.leader).toMatchObject({ leader: 'handstick', stale: true, reading_age_us: null, enabled: false });
    expect(status.leader.joints[0]).toEqual({
      joint: 'joint0',
      counts: null,
      angle_deg: null,
      health: 'silent',
      frozen: false,
    });
    expect(status.followers[0]).toMatchObject({
      state: 'absent',
      blocked_by: ['stale', 'enable'],
      lag_us: null,
      busy_us: null,
      commands: 0,
    });
    expect(JSON.parse(JSON.stringify(status))).toEqual(status);
  });

  it('says where everything is and what holds it back', () => {
    const on = new Rehearsal(plan)
      .input(2, PRESSED)
      .ready()
      .plays(4 * S, () => [50, 10]);
    const status = driveStatus(on.drive, on.nowUs + 3 * MS);
    expect(status).toMatchObject({ t_us: on.nowUs + 3 * MS, pace: 1, unison: false });
    expect(status.leader).toMatchObject({ stale: false, enabled: true, supply_ratio: 1, reading_age_us: 13 * MS });
    expect(status.leader.joints[0]).toMatchObject({ angle_deg: expect.closeTo(50, 9), health: 'sound' });
    expect(status.leader.buttons).toEqual([{ button: 'enable', does: 'enable', pressed: true }]);
    const [wren] = status.followers;
    expect(wren).toMatchObject({ state: 'following', blocked_by: [], clutched: false, moving: false, busy_us: null });
    expect(wren?.joints).toMatchObject([
      {
        joint: 'joint0',
        wanted_deg: expect.closeTo(50, 9),
        target_deg: expect.closeTo(20, 9),
        angle_deg: expect.closeTo(20, 9),
        range_deg: [expect.closeTo(-90, 9), expect.closeTo(20, 9)],
        limited_by: ['range'],
      },
      {
        joint: 'joint1',
        wanted_deg: expect.closeTo(10, 9),
        target_deg: expect.closeTo(8, 9),
        angle_deg: expect.closeTo(8, 9),
        range_deg: [expect.closeTo(-90, 9), expect.closeTo(90, 9)],
        limited_by: ['deadband'],
      },
    ]);
  });

  it('says for how long a port has been busy, and why an arm holds', () => {
    const on = new Rehearsal(plan)
      .input(2, PRESSED)
      .following()
      .key('hold')
      .board('blocked')
      .run(40 * MS)
      .board('blocked');
    const [wren] = driveStatus(on.drive, on.nowUs).followers;
    expect(wren).toMatchObject({ state: 'holding', blocked_by: ['held'], busy_us: 40 * MS });
    on.board('free');
    expect(driveStatus(on.drive, on.nowUs).followers[0]?.busy_us).toBeNull();
  });
});
