import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import type { Plan } from '../../src/drive/plan.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import type { Take } from '../../src/take/reader.ts';
import { type Demand, leastStretch, stretchFor } from '../../src/take/stretching.ts';
import { timeScale, weightedReel, weights } from '../../src/take/weighted.ts';
import { fileWriter, headerOf, opened, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
const CAST = { leader: [0, 1], followers: [] };
/** Of TWO_ARMS: 60 deg/s and 240 deg/s^2. */
const SPEED = Math.PI / 3;
const ACCEL = (4 * Math.PI) / 3;

/** Ten seconds of both leader joints on a sine of this amplitude and frequency. */
async function sine(name: string, amplitudeRad: number, hz: number, slower = 1): Promise<Take> {
  const writer = fileWriter(folder, name, headerOf(TWO_ARMS));
  for (let i = 0; i <= 2000 * slower; i++) {
    writer.row.tUs = i * 5_000;
    writer.row.event = 1;
    writer.row.poseRad.fill(amplitudeRad * Math.sin((2 * Math.PI * hz * i) / (200 * slower)));
    writer.append();
  }
  await writer.end();
  return opened(join(folder, `${name}.arrows`));
}

function demandsOf(take: Take, plan: Plan = TWO_ARMS.plan): readonly Demand[] {
  const work = leastStretch(take, plan, CAST, 'leader', { fromUs: 0, toUs: take.durationUs });
  let step = work.next();
  while (step.done !== true) step = work.next();
  return step.value;
}

describe('the least stretch of time', () => {
  it('is 1 for a motion that keeps every limit', async () => {
    // Amplitude 0.3 rad at 0.2 Hz: peak speed 0.3 * 2 pi * 0.2 = 0.377 rad/s, peak acceleration 0.474 rad/s^2.
    expect(stretchFor(demandsOf(await sine('gentle', 0.3, 0.2)))).toBe(1);
  });

  it('is that of the speed limit where speed asks for most', async () => {
    // Amplitude 1 rad at 0.25 Hz: peak speed pi / 2 = 1.571 rad/s, 1.5 times the limit; acceleration 2.47 of 4.19 rad/s^2.
    const demands = demandsOf(await sine('fast', 1, 0.25));
    expect(demands[0]?.kind).toBe('speed');
    expect(stretchFor(demands)).toBeCloseTo(Math.PI / 2 / SPEED, 2);
  });

  it('is the root of the share of the acceleration limit where acceleration asks for most', async () => {
    // Amplitude 0.25 rad at 1 Hz: peak acceleration 0.25 (2 pi)^2 = 9.87 rad/s^2, whose root over the limit is 1.535; speed
    // asks for 1.571 / 1.047 = 1.5. Both are a little less once filtered at 5 Hz: 1 / (1 + (1/5)^4) = 0.9984 there and back.
    const demands = demandsOf(await sine('hard', 0.25, 1));
    expect(demands[0]?.kind).toBe('acceleration');
    expect(stretchFor(demands)).toBeCloseTo(Math.sqrt((0.25 * (2 * Math.PI) ** 2) / ACCEL), 1);
  });

  it('is enough: played slower by it, the motion keeps every limit', async () => {
    const stretch = stretchFor(demandsOf(await sine('before', 1, 0.25)));
    const after = demandsOf(await sine('after', 1, 0.25, stretch * 1.01));
    expect(stretchFor(after)).toBe(1);
  });

  it("is not asked for by a converter's steps", async () => {
    const writer = fileWriter(folder, 'steps', headerOf(TWO_ARMS));
    for (let i = 0; i <= 5000; i++) {
      writer.row.tUs = i * 1_000;
      writer.row.event = 1;
      // One count of a 10-bit converter over 270 degrees, up and down every 40 ms: 2.6e5 deg/s^2 in 1 ms.
      writer.row.poseRad.fill(i % 80 < 40 ? 0 : ((270 / 1023) * Math.PI) / 180);
      writer.append();
    }
    await writer.end();
    expect(stretchFor(demandsOf(opened(join(folder, 'steps.arrows'))))).toBe(1);
  });
});

describe('the weight of an arm', () => {
  it('stretches its time as a pendulum of its size: T = 2 pi sqrt(L / g)', () => {
    // g = 9.80665 m/s^2 (3rd CGPM, 1901): periods of 0.634482 s at 0.1 m and 2.006409 s at 1 m.
    const period = (m: number): number => 2 * Math.PI * Math.sqrt(m / 9.80665);
    expect(period(0.1)).toBeCloseTo(0.634482, 6);
    expect(period(1)).toBeCloseTo(2.006409, 6);
    expect(timeScale(1 / 0.1)).toBeCloseTo(period(1) / period(0.1), 12);
    expect(timeScale(4)).toBe(2);
  });

  it('plays each follower on its own time', async () => {
    const take = await sine('weighed', 0.3, 0.2);
    const rows = weightedReel(take, TWO_ARMS.plan, CAST, 'leader', { fromUs: 0, toUs: 5_000_000 }, 1, [1, 2]);
    const last = [0, 0];
    let before = 0;
    for (const { tUs, followers } of rows) {
      expect(tUs).toBeGreaterThanOrEqual(before);
      before = tUs;
      const f = followers.findIndex(({ commanded }) => commanded === 1);
      last[f] = tUs;
    }
    expect(last).toEqual([5_000_000, 10_000_000]);
  });

  it('says which follower has no size', async () => {
    const found = weights(await sine('no-arm', 0.1, 0.2), TWO_ARMS.plan);
    expect(isTakeFault(found as object) ? found : 'weights').toMatchObject({ code: 'TAKE_ARM' });
  });
});
