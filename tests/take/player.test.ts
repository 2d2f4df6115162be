import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { castFollowers, castLeader, renames } from '../../src/take/cast.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import type { Take } from '../../src/take/reader.ts';
import type { Row } from '../../src/take/row.ts';
import { rigOf, rigYaml } from '../bridge/performance.ts';
import { expectLawful } from './laws.ts';
import { type Played, playingOf, type PlayingOptions, until } from './playing.ts';
import { filmed, opened, rowsOf, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
let take: Take;
let recorded: Row[];

beforeAll(async () => {
  const { performance, recorder } = filmed(folder, 'show');
  performance.run(9_000_000);
  await recorder.end();
  take = opened(join(folder, 'show.arrows'));
  recorded = rowsOf(take);
});

const playing = (rig: CompiledRig, options: PlayingOptions = {}): Played => playingOf(take, rig, options);

describe('a take that leads', () => {
  it('eases in, counts in, plays, and keeps every arm until it is parked', () => {
    const played = playing(TWO_ARMS);
    until(played, 'over');
    expect(played.phases).toEqual(['counting', 'playing', 'over']);
    played.performance.run(2_000_000);
    expect(played.performance.states()).toEqual(['following', 'following']);
    played.performance.live.key('park');
    played.performance.run(20_000_000);
    for (const { arm, is } of played.performance.live.drive.followers) {
      expect(is.state).toBe('holding');
      expect(arm.atRest()).toBe(true);
    }
    expect(played.performance.bugs).toEqual([]);
  });

  it('moves the arms as they moved, through the present profiles', () => {
    const played = playing(TWO_ARMS);
    until(played, 'playing');
    const beganUs = played.performance.clock.nowUs();
    until(played, 'over');
    const apart = recorded
      .filter(({ tUs, followers }) => tUs > 4_000_000 && tUs < 7_900_000 && followers[0]?.commanded === 1)
      .map(({ tUs, followers }) => {
        const atUs = beganUs + tUs - 3_000_000;
        const now = played.moves.findLast((move) => move.follower === 0 && move.tUs <= atUs);
        return Math.abs((now?.x[0] ?? Number.NaN) - (followers[0]?.angleRad[0] ?? 0));
      });
    expect(apart.length).toBeGreaterThan(100);
    // The commands of the two runs fall at other instants: a period of 20 ms at up to 60 deg/s lies between them.
    expect(Math.max(...apart)).toBeLessThan((1.3 * Math.PI) / 180);
  });

  it('never leaves speed or acceleration limits, whatever the speed it is played at', () => {
    for (const speed of [0.5, 1, 3]) {
      const played = playing(TWO_ARMS, { reel: { speed } });
      until(played, 'over');
      played.performance.run(5_000_000);
      expectLawful(TWO_ARMS, played.moves);
      expect(played.performance.bugs).toEqual([]);
    }
  });

  it('loops without a seam: no arm leaves the joining of end and start for lack of a limit', () => {
    const played = playing(TWO_ARMS, { reel: { fromUs: 3_000_000, toUs: 4_500_000, loopBlendS: 1 } });
    const beganUs = until(played, 'playing');
    played.performance.run(10_000_000);
    expect(played.player.is.phase).toBe('playing');
    expect(played.player.is.atUs).toBeGreaterThan(9_900_000);
    expectLawful(TWO_ARMS, played.moves);
    // Everybody follows all the time: nobody lost the leader at the seam.
    expect(played.performance.states()).toEqual(['following', 'following']);
    expect(beganUs).toBeLessThan(played.performance.clock.nowUs());
  });

  it('counts anew when somebody holds during the count-in, and nothing moves meanwhile', () => {
    const played = playing(TWO_ARMS);
    until(played, 'counting');
    played.performance.run(500_000);
    played.performance.live.key('hold', 0);
    played.performance.run(3_000_000);
    expect(played.player.is.phase).toBe('easing');
    played.performance.live.key('join', 0);
    until(played, 'playing');
    expect(played.phases).toEqual(['counting', 'easing', 'counting', 'playing']);
  });

  it('hands over to the hand in mid-play and takes over again, each time through a gentle joining', () => {
    const played = playing(TWO_ARMS);
    until(played, 'playing');
    played.performance.run(2_000_000);
    played.player.handOver();
    played.performance.run(20_000);
    expect(played.performance.states()).toEqual(['joining', 'joining']);
    played.performance.run(5_000_000);
    expect(played.performance.states()).toEqual(['following', 'following']);
    const { leader } = played.performance.live.drive;
    const handRad = leader.poseRad.slice();
    played.player.handOver();
    until(played, 'over');
    expect(played.phases).toEqual(['counting', 'playing', 'handed', 'easing', 'counting', 'playing', 'over']);
    expect(handRad.includes(Number.NaN)).toBe(false);
    expectLawful(TWO_ARMS, played.moves);
  });

  it('leads chosen joints only, and leaves the others in the hand', () => {
    const played = playing(TWO_ARMS, { posed: Uint8Array.of(1, 0) });
    until(played, 'playing');
    played.performance.run(2_000_000);
    const { drive } = played.performance.live;
    const at = recorded.findLast(({ tUs }) => tUs <= 3_000_000 + played.player.is.atUs);
    expect(drive.leader.poseRad[0]).toBeCloseTo(at?.poseRad[0] ?? Number.NaN, 2);
    expect(drive.leader.poseRad[1]).not.toBeCloseTo(at?.poseRad[1] ?? Number.NaN, 3);
  });
});

describe('a take played as commands', () => {
  it('gives the recorded angles, and the recorded pulses to the step of the wire', () => {
    const played = playing(TWO_ARMS, { by: 'commands' });
    const beganUs = until(played, 'playing');
    until(played, 'over');
    for (const follower of [0, 1]) {
      const wanted = recorded.filter(
        ({ tUs, followers }) => tUs >= 3_500_000 && tUs < 7_900_000 && followers[follower]?.commanded === 1,
      );
      const apart = wanted.map(({ tUs, followers }) => {
        const atUs = beganUs + tUs - 3_000_000;
        const move = played.moves.find((one) => one.follower === follower && Math.abs(one.tUs - atUs) < 11_000);
        return Math.abs((move?.x[0] ?? Number.NaN) - (followers[follower]?.angleRad[0] ?? 0));
      });
      expect(apart.length).toBeGreaterThan(150);
      // The frames wire has pulses in steps of a quarter microsecond: 1880 us for pi rad (560 to 2440 over 180 degrees).
      const sorted = apart.toSorted((a, b) => a - b);
      expect(sorted[Math.floor(0.95 * sorted.length)]).toBeLessThan((0.25 / 1880) * Math.PI);
    }
    expectLawful(TWO_ARMS, played.moves);
  });

  it('keeps the present limits where they are lower than the recorded ones', () => {
    const slow = rigOf(
      rigYaml([
        ['wren', 'sim:arm?name=wren'],
        ['stork', 'sim:arm?name=stork'],
      ]).replaceAll('speed_deg_s: 60', 'speed_deg_s: 10'),
    );
    const played = playing(slow, { by: 'commands' });
    until(played, 'over');
    expectLawful(slow, played.moves);
  });
});

describe('casting', () => {
  const other = rigOf(
    rigYaml([['crow', 'sim:arm?name=crow']])
      .replaceAll('name: elbow', 'name: bend')
      .replaceAll('from: elbow', 'from: bend'),
  );

  it('names the joint that is not in the take, and takes a name for it', () => {
    const none = castLeader(take, other.plan, new Map());
    expect(isTakeFault(none as object) ? none : 'cast').toMatchObject({
      code: 'TAKE_JOINTS',
      detail: expect.stringContaining('bend'),
    });
    const map = renames(take, ['elbow=bend', 'stork=crow']);
    if (isTakeFault(map)) throw new Error(map.detail);
    expect(castLeader(take, other.plan, map)).toEqual([0, 1]);
    expect(castFollowers(take, other.plan, map)).toEqual([{ follower: 1, joints: [0, 1] }]);
  });

  it('plays on another arm under its own names', () => {
    const played = playing(other, { map: ['elbow=bend', 'stork=crow'] });
    until(played, 'over');
    expect(played.player.late.count).toBeGreaterThan(400);
    expect(played.performance.bugs).toEqual([]);
  });
});

describe('the timing of a play', () => {
  it('is measured: events leave with their due stamps, however late their timers', () => {
    const played = playing(TWO_ARMS);
    until(played, 'over');
    expect(played.player.late.worstUs).toBe(0);
  });
});
