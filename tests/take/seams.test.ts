/** Where hand and take, start and end meet: no command there leaves the limits of its arm. */
import { join } from 'node:path';
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import type { Key } from '../../src/drive/events.ts';
import { momentUs, stretchOf } from '../../src/take/derive.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import type { Take } from '../../src/take/reader.ts';
import type { Row } from '../../src/take/row.ts';
import { expectLawful } from './laws.ts';
import { type Played, playingOf, type PlayingOptions, until } from './playing.ts';
import { filmed, opened, rowsOf, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
let take: Take;
let recorded: Row[];

beforeAll(async () => {
  const { performance, recorder } = filmed(folder, 'show');
  for (const [atUs, name] of [
    [4_000_000, 'down'],
    [2_500_000, 'up'],
    [2_500_000, 'out'],
  ] as const) {
    performance.run(atUs);
    recorder.mark(name);
    performance.live.key('mark');
  }
  await recorder.end();
  take = opened(join(folder, 'show.arrows'));
  recorded = rowsOf(take);
});

const WAYS = ['leader', 'commands'] as const;
const DEG = Math.PI / 180;

const playing = (options: PlayingOptions, handUs?: number): Played => playingOf(take, TWO_ARMS, options, handUs);

/** Where each joint of the first arm was told to be at an instant. */
function toldAt({ moves }: Played, atUs: number): readonly number[] {
  return Array.from(moves.findLast(({ follower, tUs }) => follower === 0 && tUs <= atUs)?.x ?? []);
}

/** Where it was told to be while the take was recorded. */
function recordedAt(tUs: number): readonly number[] {
  const row = recorded.findLast((one) => one.tUs <= tUs && one.followers[0]?.commanded === 1);
  return Array.from(row?.followers[0]?.angleRad ?? []);
}

function apartDeg(a: readonly number[], b: readonly number[]): number {
  expect(a.length).toBe(b.length);
  return Math.max(...a.map((angle, j) => Math.abs(angle - (b[j] as number)))) / DEG;
}

/** Commands of two runs fall up to a period of 20 ms apart, at up to 60 deg/s. */
const PERIOD_DEG = 1.3;

describe.each(WAYS)('a take played as %s', (by) => {
  it.each([4_000_000, 7_300_000])(
    'eases in from wherever the arms are, and parks out (%d us by hand before)',
    (handUs) => {
      const played = playing({ by }, handUs);
      const far = apartDeg(toldAt(played, Number.POSITIVE_INFINITY), recordedAt(3_000_000));
      const beganUs = until(played, 'playing');
      expect(far).toBeGreaterThan(3);
      expect(apartDeg(toldAt(played, beganUs), recordedAt(3_000_000))).toBeLessThan(PERIOD_DEG);
      until(played, 'over');
      played.performance.live.key('park');
      played.performance.run(20_000_000);
      for (const { arm } of played.performance.live.drive.followers) expect(arm.atRest()).toBe(true);
      expectLawful(TWO_ARMS, played.moves);
      expect(played.performance.bugs).toEqual([]);
    },
  );

  it('loops with a seam inside every limit, through which it ends up where it began', () => {
    const played = playing({ by, reel: { fromUs: 3_000_000, toUs: 6_000_000, loopBlendS: 1.5 } });
    const beganUs = until(played, 'playing');
    played.performance.run(20_000_000);
    // Each round is 3 s and a blend of 1.5 s.
    for (const round of [1, 2, 3]) {
      const again = toldAt(played, beganUs + round * 4_500_000 + 1_000_000);
      expect(apartDeg(again, toldAt(played, beganUs + 1_000_000)), `round ${round}`).toBeLessThan(PERIOD_DEG);
    }
    expect(played.performance.states()).toEqual(['following', 'following']);
    expectLawful(TWO_ARMS, played.moves);
  });

  it('goes from mark to mark', () => {
    const stretch = stretchOf(take, 'down', 'up');
    if (isTakeFault(stretch)) throw new Error(stretch.detail);
    expect(stretch).toEqual({ fromUs: 4_000_000, toUs: 6_500_000 });
    const played = playing({ by, reel: stretch });
    const beganUs = until(played, 'playing');
    const overUs = until(played, 'over');
    expect(Math.abs(overUs - beganUs - 2_500_000)).toBeLessThan(60_000);
    expect(apartDeg(toldAt(played, beganUs), recordedAt(stretch.fromUs))).toBeLessThan(PERIOD_DEG);
    played.performance.run(1_000_000);
    expect(apartDeg(toldAt(played, Number.POSITIVE_INFINITY), recordedAt(momentUs(take, 'up') as number))).toBeLessThan(
      PERIOD_DEG,
    );
    expectLawful(TWO_ARMS, played.moves);
  });

  it.each([0.5, 0.8, 2])('takes its time divided by %d at that speed', (speed) => {
    const played = playing({ by, reel: { fromUs: 3_000_000, toUs: 6_500_000, speed } });
    const beganUs = until(played, 'playing');
    const overUs = until(played, 'over');
    expect(Math.abs(overUs - beganUs - 3_500_000 / speed)).toBeLessThan(60_000);
    expectLawful(TWO_ARMS, played.moves);
    // Where arms cannot keep up they are late, and then where the take ends.
    played.performance.run(2_000_000);
    expect(apartDeg(toldAt(played, Number.POSITIVE_INFINITY), recordedAt(6_500_000))).toBeLessThan(PERIOD_DEG);
  });

  it('is at half the speed where it was in half the time', () => {
    const played = playing({ by, reel: { fromUs: 3_000_000, toUs: 7_000_000, speed: 0.5 } });
    const beganUs = until(played, 'playing');
    until(played, 'over');
    for (const tUs of [1_000_000, 2_000_000, 3_000_000])
      expect(apartDeg(toldAt(played, beganUs + 2 * tUs), recordedAt(3_000_000 + tUs))).toBeLessThan(PERIOD_DEG);
  });

  it('gives over to the hand and takes over again at any moment, in the blend of a loop too, inside every limit', () => {
    const moments = fc.array(fc.integer({ min: 20_000, max: 4_000_000 }), { minLength: 1, maxLength: 5 });
    const speeds = fc.constantFrom(0.5, 1, 2.5);
    fc.assert(
      fc.property(moments, speeds, (waitsUs, speed) => {
        const played = playing({
          by,
          countInUs: 300_000,
          reel: { fromUs: 3_000_000, toUs: 4_500_000, speed, loopBlendS: 0.7 },
        });
        until(played, 'playing');
        for (const us of waitsUs) {
          played.performance.run(us);
          const wasHanded = played.player.is.phase === 'handed';
          played.player.handOver();
          expect(played.player.is.phase === 'handed').toBe(!wasHanded);
        }
        if (played.player.is.phase === 'handed') played.player.handOver();
        until(played, 'playing');
        expectLawful(TWO_ARMS, played.moves);
        expect(played.performance.bugs).toEqual([]);
      }),
      { numRuns: 12 },
    );
  });

  it('obeys every key while it plays, and no arm leaves its limits', () => {
    const keys = fc.constantFrom<Key>('hold', 'join', 'stop', 'rearm', 'park', 'clutch');
    const pressed = fc.array(
      fc.tuple(fc.integer({ min: 20_000, max: 1_500_000 }), keys, fc.integer({ min: 0, max: 1 })),
      {
        minLength: 1,
        maxLength: 8,
      },
    );
    fc.assert(
      fc.property(pressed, (presses) => {
        const played = playing({ by, countInUs: 200_000, reel: { fromUs: 3_000_000, toUs: 6_000_000, loopBlendS: 1 } });
        until(played, 'playing');
        for (const [us, key, follower] of presses) {
          played.performance.run(us);
          played.performance.live.key(key, follower);
        }
        played.performance.run(2_000_000);
        expectLawful(TWO_ARMS, played.moves);
        expect(played.performance.bugs).toEqual([]);
      }),
      { numRuns: 12 },
    );
  });
});
