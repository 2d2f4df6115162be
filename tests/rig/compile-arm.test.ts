import { describe, expect, it } from 'vitest';
import { compileArm, compileKeepOut, compileWhole } from '../../src/rig/compile-arm.ts';
import { reaching } from '../../src/arm/reaching.ts';
import { arm } from '../../src/rig/schema/arm.ts';
import { follower } from '../../src/rig/schema/follower.ts';
import type { FollowerProfile } from '../../src/rig/schema/follower.ts';
import { edited, RIG, rigIn, STORK } from './memory.ts';

const RAD = Math.PI / 180;
const JOINTS = [{ name: 'base' }, { name: 'shoulder' }, { name: 'grip' }];
const ONE_LINK = { joint: 'shoulder', axis: 'y', to_mm: [0, 0, 40] };

const compiled = (file: unknown) => compileArm(arm.parse(file), JOINTS);

describe('a compiled arm', () => {
  it('is in metres, kilograms, newtons and radians', () => {
    const spec = compiled({
      base: {
        height_mm: 120,
        tilt_deg: [180, -90],
        mass_g: 4000,
        footprint_mm: [
          [120, 90],
          [-120, 90],
          [0, -90],
        ],
        friction: 0.4,
      },
      links: [
        { joint: 'base', axis: 'z', to_mm: [0, 0, 60], mass_g: 300, centre_mm: [0, 10, 30] },
        {
          ...ONE_LINK,
          mass_g: 900,
          counterweight: { mass_g: 1500, at_mm: [0, 0, -120] },
          spring: { n_per_mm: 0.8, free_mm: 60, from_mm: [0, 0, 90], to_mm: [-40, 0, 30] },
          motor: { stall_nm: 6, stall_a: 2.4 },
          drag_nm: 0.02,
          cable: { nm_per_deg: 0.001, free_deg: 5 },
        },
      ],
      payload: { mass_g: 50, at_mm: [0, 0, 20] },
    });
    expect(spec.base).toEqual({
      heightM: 0.12,
      tiltRad: [Math.PI, -Math.PI / 2],
      massKg: 4,
      footprintM: [
        [0.12, 0.09],
        [-0.12, 0.09],
        [0, -0.09],
      ],
      friction: 0.4,
    });
    expect(spec.links[0]).toMatchObject({ joint: 0, axis: [0, 0, 1], massKg: 0.3, centreM: [0, 0.01, 0.03] });
    expect(spec.links[1]).toEqual({
      joint: 1,
      axis: [0, 1, 0],
      toM: [0, 0, 0.04],
      massKg: 0.9,
      // Not measured: halfway along.
      centreM: [0, 0, 0.02],
      counterweight: { massKg: 1.5, atM: [0, 0, -0.12] },
      // 0.8 N/mm = 800 N/m.
      spring: { nPerM: 800, freeM: 0.06, fromM: [0, 0, 0.09], toM: [-0.04, 0, 0.03] },
      // use and hold_use as the schema gives them.
      motor: { stallNm: 6, use: 0.5, holdUse: 0.3, stallA: 2.4 },
      dragNm: 0.02,
      // 0.001 Nm a degree is 0.001 * 180 / pi Nm a radian.
      cable: { nmPerRad: 0.001 / RAD, freeRad: 5 * RAD },
    });
    expect(spec.payload).toEqual({ massKg: 0.05, atM: [0, 0, 0.02] });
  });

  it('says null where the file gives no data', () => {
    const spec = compiled({ links: [ONE_LINK] });
    expect(spec.base).toEqual({ heightM: 0, tiltRad: [0, 0], massKg: null, footprintM: null, friction: null });
    expect(spec.links[0]).toMatchObject({ massKg: 0, counterweight: null, spring: null, motor: null, cable: null });
    expect(spec.payload).toBeNull();
  });

  it('takes an axis by its direction, whatever its length', () => {
    // 3-4-5: [0, 3, 4] is 5 long.
    expect(compiled({ links: [{ ...ONE_LINK, axis: [0, 3, 4] }] }).links[0]?.axis).toEqual([0, 0.6, 0.8]);
  });
});

/** 0.5 m high base turn, two links that reach, a twist about the last one, and a grip without a link. */
const FIVE: FollowerProfile = follower.parse({
  follower: 'crane',
  port: 'sim:arm',
  wire: 'frames',
  joints: ['base', 'shoulder', 'elbow', 'twist', 'grip'].map((name, channel) => ({
    name,
    range_deg: [-1, 1],
    speed_deg_s: 10,
    accel_deg_s2: 10,
    servo: {
      channel,
      points: [
        [-1, 1000],
        [1, 2000],
      ],
    },
  })),
  arm: {
    links: [
      { joint: 'base', axis: 'z', to_mm: [0, 0, 100] },
      { joint: 'shoulder', axis: 'y', to_mm: [0, 0, 300] },
      { joint: 'elbow', axis: 'y', to_mm: [0, 0, 200] },
      { joint: 'twist', axis: 'z', to_mm: [0, 0, 150] },
    ],
  },
  keep_out: [
    { below_mm: -20 },
    {
      box_mm: [
        [1, 2, 3],
        [4, 5, 6],
      ],
    },
  ],
});
const RANGES = FIVE.joints.map(() => ({ minRad: -RAD, maxRad: RAD }));

describe('the joints that reach', () => {
  it('are those with a link, without a twist about its own link and a grip without one', () => {
    const geometry = compileArm(arm.parse(FIVE.arm), FIVE.joints);
    // The base's axis runs through the tip while all stands upright, and no longer when a shoulder leans.
    expect(reaching(geometry, RANGES)).toEqual([0, 1, 2]);
  });

  it('are all of them where the last link is bent away from its axis', () => {
    const links = FIVE.arm?.links.map((link) => (link.joint === 'twist' ? { ...link, to_mm: [1, 0, 150] } : link));
    const geometry = compileArm(arm.parse({ ...FIVE.arm, links }), FIVE.joints);
    expect(reaching(geometry, RANGES)).toEqual([0, 1, 2, 3]);
  });
});

describe('what a follower has to keep as a whole arm', () => {
  const leader = compiled({ links: [{ ...ONE_LINK, to_mm: [0, 30, 40] }] });
  const joints = FIVE.joints.map(({ name }, j) => ({
    name,
    sources: [],
    gain: 1,
    offsetRad: 0,
    deadbandRad: 0,
    speedRadS: 1,
    accelRadS2: 1,
    restRad: 0,
    ...(RANGES[j] as (typeof RANGES)[number]),
  }));
  const whole = (keys: Partial<FollowerProfile>) => compileWhole({ ...FIVE, ...keys }, joints, leader);

  it('is nothing where the file gives no geometry', () => {
    const { arm: _, ...bare } = FIVE;
    expect(compileWhole(bare as FollowerProfile, joints, leader)).toBeNull();
    expect(rigIn({ 'rig.yaml': RIG, 'stork.yaml': STORK }).rig.plan.followers[0]).not.toHaveProperty('whole');
  });

  it('is told in metres, and as little as the file asks', () => {
    expect(whole({})).toMatchObject({
      endSpeedMS: null,
      keepOut: [
        { kind: 'below', zM: -0.02 },
        { kind: 'box', minM: [0.001, 0.002, 0.003], maxM: [0.004, 0.005, 0.006] },
      ],
      limitLoad: false,
      limitAccel: false,
      tip: null,
    });
    expect(whole({ tip_speed_mm_s: 250, load: 'limit', moving_load: 'limit' })).toMatchObject({
      endSpeedMS: 0.25,
      limitLoad: true,
      limitAccel: true,
    });
  });

  it('keeps out of places that are larger by their clearance, up and on every side', () => {
    const [floor, box] = FIVE.keep_out as [FollowerProfile['keep_out'][number], FollowerProfile['keep_out'][number]];
    // By hand: -20 + 5 mm; a box of 1 to 4, 2 to 5 and 3 to 6 mm, 10 larger each way.
    expect(compileKeepOut({ ...floor, clearance_mm: 5 })).toEqual({ kind: 'below', zM: expect.closeTo(-0.015, 12) });
    expect(compileKeepOut({ ...box, clearance_mm: 10 })).toEqual({
      kind: 'box',
      minM: [-9, -8, -7].map((mm) => expect.closeTo(mm / 1000, 12) as number),
      maxM: [14, 15, 16].map((mm) => expect.closeTo(mm / 1000, 12) as number),
    });
  });

  it('copies the leader’s tip at the ratio of reaches unless told otherwise', () => {
    // Reach 100 + 300 + 200 + 150 = 750 mm; the leader's 30-40-50 triangle reaches 50 mm.
    expect(whole({ follow: 'tip' })?.tip).toMatchObject({
      leader,
      scale: expect.closeTo(15, 12),
      originM: [0, 0, 0],
      mirror: false,
      turnRad: 0,
      keepPitch: false,
      reaching: [0, 1, 2],
    });
    const tip = { scale: 3, origin_mm: [100, 0, -50], mirror: true, turn_deg: 90, keep_pitch: true };
    expect(whole({ follow: 'tip', tip: tip as NonNullable<FollowerProfile['tip']> })?.tip).toMatchObject({
      scale: 3,
      originM: [0.1, 0, -0.05],
      mirror: true,
      turnRad: Math.PI / 2,
      keepPitch: true,
    });
  });

  it('comes with a rig whose follower has an arm', () => {
    const armed = edited(STORK, [
      'poses:',
      'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 40] }] }\nposes:',
    ]);
    const [stork] = rigIn({ 'rig.yaml': RIG, 'stork.yaml': armed }).rig.plan.followers;
    expect(stork?.whole?.arm.links).toHaveLength(1);
    expect(stork?.whole?.tip).toBeNull();
  });
});
