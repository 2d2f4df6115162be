import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { balance, type BalanceWish, unloaded } from '../../src/arm/balance.ts';
import { balancingSpring } from '../../src/arm/balancing-spring.ts';
import { burden } from '../../src/arm/burden.ts';
import { loads } from '../../src/arm/load.ts';
import type { ArmSpec, Vec3 } from '../../src/arm/spec.ts';
import { nearestPieces } from '../../src/arm/stock.ts';
import { angles, arm, DEG, finite, link, planar, X, Y, Z } from './arms.ts';

const G = 9.80665;

/** A little more than a quarter turn either way: every joint can be horizontal. */
function ranges(n: number, most = 1.6) {
  return { minRad: new Float64Array(n).fill(-most), maxRad: new Float64Array(n).fill(most) };
}

/** Torques at a pose, without payload and with it. */
function torques(spec: ArmSpec, pose: Float64Array): number[][] {
  return [unloaded(spec), spec].map((one) => {
    const out = new Float64Array(pose.length);
    loads(one, pose.length).torqueNm(pose, out);
    return [...out];
  });
}

/** A column that turns, a shoulder and an elbow, with masses at hand-sized places. */
const lamp = (payloadKg: number | null): ArmSpec =>
  arm(
    [
      link(0, Z, [0, 0, 0.1], { massKg: 0.5 }),
      link(1, Y, [0, 0, 0.4], { massKg: 0.6, centreM: [0, 0, 0.2] }),
      link(2, Y, [0, 0, 0.3], { massKg: 0.3, centreM: [0, 0, 0.1] }),
    ],
    {},
    payloadKg === null ? null : { massKg: payloadKg, atM: [0, 0, 0] },
  );

describe('counterweights, from the tip inward', () => {
  it('hold an arm without payload in every pose, each seeing the ones further out', () => {
    const wishes: BalanceWish[] = [
      { joint: 1, distanceM: 0.15 },
      { joint: 2, distanceM: 0.1 },
    ];
    const { spec, joints, idle } = balance(lamp(null), { wishes, ...ranges(3), stock: null });
    expect(joints.map(({ joint }) => joint)).toEqual([2, 1]);
    expect(idle).toEqual([]);
    // By hand. Elbow: 0.3 kg at 0.1 m over 0.1 m = 0.3 kg. Shoulder: 0.6 at 0.2, and 0.6 kg (arm and weight) at 0.4: 0.36 kg m
    // over 0.15 m = 2.4 kg. Without the elbow's weight it would have been 0.6 * 0.2 + 0.3 * 0.4 = 0.24: 1.6 kg and a stray.
    expect(joints[0]?.counterweight.massKg).toBeCloseTo(0.3, 6);
    expect(joints[0]?.counterweight.atM[2]).toBeCloseTo(-0.1, 9);
    expect(joints[1]?.counterweight.massKg).toBeCloseTo(2.4, 5);
    for (const one of joints) {
      expect(one.strayNm).toBeLessThan(1e-5);
      expect(one.after.value).toBeLessThan(1e-4);
    }
    fc.assert(
      fc.property(angles(3, 3), (pose) => {
        for (const torque of torques(spec, pose))
          for (const value of torque) expect(Math.abs(value)).toBeLessThan(1e-4);
      }),
    );
  });

  it('leave what the payload and the joints beyond move, as stated, and no more', () => {
    const asked = fc.record({
      lengths: fc.array(finite(0.1, 0.5), { minLength: 2, maxLength: 4 }),
      masses: fc.array(finite(0.05, 1), { minLength: 4, maxLength: 4 }),
      payloadKg: finite(0.05, 0.5),
      sides: fc.array(finite(-0.1, 0.1), { minLength: 4, maxLength: 4 }),
    });
    fc.assert(
      fc.property(asked, angles(5, 1.5), ({ lengths, masses, payloadKg, sides }, pose) => {
        const links = lengths.map((lengthM, i) =>
          link(i + 1, i % 2 === 0 ? Y : X, [0, 0, lengthM], {
            massKg: masses[i] as number,
            centreM: [sides[i] as number, 0.02, lengthM / 2],
          }),
        );
        const whole = arm([link(0, Z, [0, 0, 0.1]), ...links], {}, { massKg: payloadKg, atM: [0, 0, 0.02] });
        const n = whole.links.length;
        // The innermost bending joint only: the ones beyond stay as they are, and move their weights.
        const { spec, joints } = balance(whole, { wishes: [{ joint: 1, distanceM: 0.2 }], ...ranges(n), stock: null });
        const [one] = joints;
        for (const torque of torques(spec, pose.subarray(0, n))) {
          const left = Math.abs(torque[1] as number);
          expect(left).toBeLessThanOrEqual((one?.after.value as number) * 1.01 + 1e-6);
          expect(left).toBeLessThanOrEqual((one?.strayNm as number) * 1.01 + 1e-6);
        }
      }),
      { numRuns: 25 },
    );
  });

  it('share the payload: half of its torque is left without it and half with it', () => {
    const { joints } = balance(lamp(0.2), { wishes: [{ joint: 2, distanceM: 0.1 }], ...ranges(3), stock: null });
    // By hand: 0.03 kg m without and 0.03 + 0.2 * 0.3 = 0.09 with; the middle is 0.06, 0.03 off either.
    expect(joints[0]?.counterweight.massKg).toBeCloseTo(0.6, 4);
    expect(joints[0]?.strayNm).toBeCloseTo(0.03 * G, 4);
    expect(joints[0]?.after.value).toBeCloseTo(0.03 * G, 4);
    expect(joints[0]?.before.value).toBeCloseTo(0.09 * G, 4);
  });

  it('are set at the distance that a given mass needs', () => {
    const { joints } = balance(lamp(null), { wishes: [{ joint: 2, massKg: 0.25 }], ...ranges(3), stock: null });
    // By hand: 0.03 kg m / 0.25 kg.
    expect(joints[0]?.counterweight.atM[2]).toBeCloseTo(-0.12, 6);
    expect(joints[0]?.exactDistanceM).toBeCloseTo(0.12, 6);
  });

  it('are made of what the workshop has, and what one joint took is gone for the next', () => {
    const stock = [{ massKg: 0.05, count: 5 }];
    const wishes: BalanceWish[] = [
      { joint: 1, distanceM: 0.3 },
      { joint: 2, distanceM: 0.2 },
    ];
    const { joints } = balance(lamp(null), { wishes, ...ranges(3), stock });
    // By hand: the elbow wants 0.15 kg: three pieces. The shoulder then wants 0.6 * 0.2 + 0.45 * 0.4 = 0.3 kg m over 0.3 m,
    // 1 kg, and gets the two that are left; slid to 0.3 / 0.1 = 3 m they would be enough.
    expect(joints[0]?.taken).toMatchObject({ counts: [3] });
    expect(joints[0]?.after.value).toBeLessThan(1e-4);
    expect(joints[1]?.taken).toMatchObject({ counts: [2] });
    expect(joints[1]?.exactDistanceM).toBeCloseTo(3, 4);
    expect(joints[1]?.after.value).toBeCloseTo((0.3 - 0.03) * G, 3);
  });

  it('lie opposite to the centre of mass, also where that is beside the link', () => {
    const crooked = arm([link(0, Y, [0, 0, 0.3], { massKg: 1, centreM: [0.04, 0.5, 0.03] })]);
    const { joints } = balance(crooked, { wishes: [{ joint: 0, distanceM: 0.1 }], ...ranges(1), stock: null });
    // By hand: across y the centre is 0.05 m away, along y does not matter: 0.5 kg at -(0.8, 0, 0.6) of 0.1 m.
    const at = joints[0]?.counterweight.atM as Vec3;
    expect(joints[0]?.counterweight.massKg).toBeCloseTo(0.5, 6);
    expect(at[0]).toBeCloseTo(-0.08, 6);
    expect(at[1]).toBeCloseTo(0, 6);
    expect(at[2]).toBeCloseTo(-0.06, 6);
  });

  it('are not asked of a joint that nothing pulls at', () => {
    const { joints, idle, spec } = balance(lamp(null), {
      wishes: [{ joint: 0, distanceM: 0.1 }],
      ...ranges(3),
      stock: null,
    });
    expect(joints).toEqual([]);
    expect(idle).toEqual([0]);
    expect(spec.links[0]?.counterweight).toBeNull();
  });

  it('replace a weight that is there', () => {
    const wishes: BalanceWish[] = [{ joint: 2, distanceM: 0.1 }];
    const once = balance(lamp(null), { wishes, ...ranges(3), stock: null });
    const twice = balance(once.spec, { wishes, ...ranges(3), stock: null });
    expect(twice.joints[0]?.counterweight.massKg).toBeCloseTo(0.3, 6);
  });
});

describe('a stock of pieces', () => {
  const stock = [
    { massKg: 0.05, count: 5 },
    { massKg: 0.2, count: 2 },
  ];

  it('gives the nearest mass there is, with the fewest pieces', () => {
    // By hand: 0.25 is 0.2 + 0.05, not five of 0.05; 0.33 is nearest to 0.35; 1 kg is more than the 0.65 there are.
    expect(nearestPieces(stock, 0.25)).toMatchObject({ counts: [1, 1] });
    expect(nearestPieces(stock, 0.33).massKg).toBeCloseTo(0.35, 12);
    expect(nearestPieces(stock, 1)).toMatchObject({ counts: [5, 2] });
    expect(nearestPieces(stock, 0.01)).toMatchObject({ counts: [0, 0] });
    expect(nearestPieces([], 1)).toEqual({ massKg: 0, counts: [] });
  });

  it('finds what trying every handful finds', () => {
    const pieces = fc.array(fc.record({ massKg: finite(0.01, 0.5), count: fc.integer({ min: 0, max: 4 }) }), {
      maxLength: 4,
    });
    fc.assert(
      fc.property(pieces, finite(0, 3), (some, wantedKg) => {
        let sums = [0];
        for (const { massKg, count } of some)
          sums = sums.flatMap((sum) => Array.from({ length: count + 1 }, (_, k) => sum + k * massKg));
        const best = Math.min(...sums.map((sum) => Math.abs(sum - wantedKg)));
        // Masses closer than a tenth of a gram are one, and that may add up over four kinds.
        expect(Math.abs(nearestPieces(some, wantedKg).massKg - wantedKg)).toBeLessThanOrEqual(best + 5e-4);
      }),
    );
  });
});

describe('the spring that would do the same', () => {
  const request = { joint: 2, aboveM: 0.1, alongM: 0.15, freeM: 0, ...ranges(3) };

  it('has k = m g L / (a b) and is exact where its fixed end does not turn', () => {
    const found = balancingSpring(lamp(null), { ...request, joint: 1 });
    // Static balancing by a spring without free length (from memory, derived in load.test.ts). The elbow beyond is bent over its
    // range, so the shoulder carries the middle of what it can weigh; an elbow that cannot bend is exact.
    const stiff = { minRad: Float64Array.of(-1, -1.5, 0), maxRad: Float64Array.of(1, 1.5, 0) };
    const exact = balancingSpring(lamp(null), { ...request, joint: 1, ...stiff });
    const mL = 0.6 * 0.2 + 0.3 * 0.5;
    expect(exact?.spring.nPerM).toBeCloseTo((mL * G) / (0.1 * 0.15), 4);
    expect(exact?.fixed).toBe(true);
    expect(exact?.after.value).toBeLessThan(1e-6);
    expect(found?.after.value).toBeGreaterThan(0.01);
  });

  it('says so, and how much is left, where its fixed end turns with the link before', () => {
    const found = balancingSpring(lamp(null), request);
    expect(found?.fixed).toBe(false);
    const weightOnly = 0.03 * G;
    expect(found?.after.value).toBeGreaterThan(0.3 * weightOnly);
    const still = { minRad: Float64Array.of(-1, 0, -1.5), maxRad: Float64Array.of(1, 0, 1.5) };
    const held = balancingSpring(lamp(null), { ...request, ...still });
    expect(held?.fixed).toBe(true);
    expect(held?.after.value).toBeLessThan(1e-6);
  });

  it('hangs from above too', () => {
    const hung: ArmSpec = { ...lamp(null), base: { ...lamp(null).base, tiltRad: [Math.PI, 0], heightM: 3 } };
    const still = { minRad: Float64Array.of(-1, -1.2, 0), maxRad: Float64Array.of(1, 1.2, 0) };
    const found = balancingSpring(hung, { ...request, joint: 1, ...still });
    // Above the axis is towards the ceiling: along -z of the hung column.
    expect(found?.spring.fromM[2]).toBeCloseTo(0.1 - 0.1, 9);
    expect(found?.after.value).toBeLessThan(1e-6);
  });

  it('with a free length gets the stiffness with the least squares: no other does better by that', () => {
    const still = { minRad: Float64Array.of(0, 20 * DEG, 0), maxRad: Float64Array.of(0, 120 * DEG, 0) };
    const real = balancingSpring(lamp(null), { ...request, joint: 1, freeM: 0.06, ...still });
    const left = (nPerM: number): number => {
      const spring = { ...(real as NonNullable<typeof real>).spring, nPerM };
      const spec: ArmSpec = {
        ...lamp(null),
        links: lamp(null).links.map((one, i) => (i === 1 ? { ...one, spring } : one)),
      };
      let sum = 0;
      for (let deg = 20; deg <= 120; deg += 0.5)
        sum += (torques(spec, Float64Array.of(0, deg * DEG, 0))[0]?.[1] as number) ** 2;
      return sum;
    };
    const best = real?.spring.nPerM as number;
    expect(left(best)).toBeLessThan(left(1.03 * best));
    expect(left(best)).toBeLessThan(left(0.97 * best));
    expect(real?.after.value).toBeLessThan(0.4 * G * 0.27);
    expect(real?.after.value).toBeGreaterThan(0.001);
  });

  it('is none where nothing pulls', () => {
    expect(balancingSpring(lamp(null), { ...request, joint: 0 })).toBeNull();
    expect(balancingSpring(planar([0.3]), { ...request, joint: 0, ...ranges(1) })).toBeNull();
  });
});

describe('what balancing costs', () => {
  it('is mass on the bearing, inertia and acceleration left, and it shifts where the arm tips', () => {
    const motor = { stallNm: 6, use: 0.5, holdUse: 0.3, stallA: null };
    const base = {
      massKg: 1,
      footprintM: [
        [0.1, 0.1],
        [-0.1, 0.1],
        [-0.1, -0.1],
        [0.1, -0.1],
      ] as const,
    };
    const bare: ArmSpec = {
      ...arm([link(0, Y, [0, 0, 0.4], { massKg: 0.5, centreM: [0, 0, 0.2], motor, dragNm: 0.1 })]),
      base: { ...lamp(null).base, ...base },
    };
    const { spec } = balance(bare, { wishes: [{ joint: 0, distanceM: 0.1 }], ...ranges(1, 90 * DEG), stock: null });
    const [before, after] = [bare, spec].map((one) =>
      burden(one, new Float64Array(1).fill(-90 * DEG), new Float64Array(1).fill(90 * DEG)),
    );
    // By hand: 1 kg at 0.1 m balances 0.5 kg at 0.2 m. Inertia 0.5 * 0.4^2 / 3, plus 1 * 0.1^2.
    expect(before?.movingKg).toBeCloseTo(0.5, 9);
    expect(after?.movingKg).toBeCloseTo(1.5, 6);
    expect(before?.joints[0]?.inertiaKgM2).toBeCloseTo(0.0266667, 6);
    expect(after?.joints[0]?.inertiaKgM2).toBeCloseTo(0.0366667, 6);
    // 3 N m to use, less 0.1 of drag: less the 0.980665 of the weight before, less nothing after.
    expect(before?.joints[0]?.accelLeftRadS2).toBeCloseTo((2.9 - 0.980665) / 0.0266667, 1);
    expect(after?.joints[0]?.accelLeftRadS2).toBeCloseTo(2.9 / 0.0366667, 1);
    // About the front edge: 1 kg at 0.1 m holds, 0.5 kg at 0.1 m beyond tips: nothing is left; balanced, 2.5 kg at 0.1 m hold.
    expect(before?.tippingNm).toBeCloseTo(0.1 * G - 0.05 * G, 6);
    expect(after?.tippingNm).toBeCloseTo(0.25 * G, 4);
  });
});
