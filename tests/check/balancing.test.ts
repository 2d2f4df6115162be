import { describe, expect, it } from 'vitest';
import { balanceReport, balanceSubject } from '../../src/check/balancing.ts';
import type { BalanceOptions, BalanceReport, BalanceSubject } from '../../src/check/balancing.ts';
import { balanceLines } from '../../src/check/balancing-text.ts';
import { loadProfile } from '../../src/rig/load.ts';
import { edited, fromMemory, STORK } from '../rig/memory.ts';
import { CRANE } from './crane.ts';

/** Standard gravity, 3rd CGPM 1901. */
const G = 9.80665;

const PLAIN: BalanceOptions = {
  only: null,
  distanceMm: null,
  massG: null,
  stock: null,
  springFreeMm: 0,
  springAboveMm: null,
  springAlongMm: null,
};

/** One uniform link of 1 kg and 400 mm that a shoulder turns, with 100 g at its tip. */
const MAST = edited(STORK, [
  'poses:',
  `arm:
  links:
    - { joint: shoulder, axis: y, to_mm: [0, 0, 400], mass_g: 1000, motor: { stall_nm: 10 } }
  payload: { mass_g: 100, at_mm: [0, 0, 0] }
poses:`,
]);

function subjectIn(text: string): BalanceSubject {
  const loaded = loadProfile('arm.yaml', fromMemory({ 'arm.yaml': text }));
  if ('mistakes' in loaded || loaded.kind === 'rig') throw new Error('no profile');
  const subject = balanceSubject(loaded);
  if (typeof subject === 'string') throw new Error(subject);
  return subject;
}

const reported = (text: string, options: Partial<BalanceOptions> = {}): BalanceReport =>
  balanceReport(subjectIn(text), { ...PLAIN, ...options });

function only(report: BalanceReport) {
  const [joint, ...others] = report.joints;
  if (joint === undefined || others.length > 0) throw new Error('not one joint');
  return joint;
}

describe('the counterweight of a joint', () => {
  it('takes the middle between no payload and all of it, at a distance', () => {
    // 1 kg at 0.2 m and 0.1 kg at 0.4 m: 0.2 kg m empty, 0.24 full, 0.22 in the middle: 2.2 kg at 0.1 m.
    const joint = only(reported(MAST, { distanceMm: 100 }));
    expect(joint.counterweight).toEqual({ mass_g: expect.closeTo(2200, 0), at_mm: [0, 0, -100] });
    // The shoulder turns to 85 degrees: what is left is 0.02 kg m times sin 85; what can be left is all of it.
    expect(joint.after_nm).toBeCloseTo(G * 0.02 * Math.sin((85 * Math.PI) / 180), 2);
    expect(joint.stray_nm).toBeCloseTo(G * 0.02, 2);
    expect(joint.before_nm).toBeCloseTo(G * 0.24 * Math.sin((85 * Math.PI) / 180), 5);
    expect(joint.after_empty_nm).toBeCloseTo(joint.after_full_nm, 2);
    // 10 Nm * 0.3 may be held.
    expect(joint.after_share).toBeCloseTo(joint.after_nm / 3, 9);
  });

  it('has its distance found for a mass', () => {
    const joint = only(reported(MAST, { massG: 1000 }));
    expect(joint.counterweight).toEqual({ mass_g: 1000, at_mm: [0, 0, expect.closeTo(-220, 0)] });
    expect(joint.exact_distance_mm).toBeCloseTo(220, 0);
  });

  it('is made of what the workshop has, and slid to where it balances', () => {
    const stock = [
      { massKg: 0.5, count: 9 },
      { massKg: 0.3, count: 9 },
    ];
    // 2200 g at 100 mm: 2 x 500 + 4 x 300 is exact; of no more than three of each, 3 x 500 + 2 x 300 = 2100 g is nearest.
    expect(only(reported(MAST, { distanceMm: 100, stock }))).toMatchObject({
      counterweight: { mass_g: 2200 },
      pieces: [
        { mass_g: 500, count: 2 },
        { mass_g: 300, count: 4 },
      ],
      exact_distance_mm: expect.closeTo(100, 0),
    });
    const few = stock.map((piece) => ({ ...piece, count: 3 }));
    expect(only(reported(MAST, { distanceMm: 100, stock: few }))).toMatchObject({
      pieces: [
        { mass_g: 500, count: 3 },
        { mass_g: 300, count: 2 },
      ],
      // 0.22 kg m / 2.1 kg.
      exact_distance_mm: expect.closeTo(104.8, 0),
    });
  });

  it('is none where the smallest piece is too much', () => {
    const report = reported(MAST, { distanceMm: 100, stock: [{ massKg: 9, count: 1 }] });
    expect(only(report)).toMatchObject({ counterweight: null, pieces: [], exact_distance_mm: null });
    expect(balanceLines(report).join('\n')).toContain('no pieces fit');
  });

  it('goes where a weight is already, and replaces it', () => {
    const text = edited(MAST, [
      'motor: { stall_nm: 10 }',
      'motor: { stall_nm: 10 }, counterweight: { mass_g: 50, at_mm: [0, 0, -110] }',
    ]);
    // 0.22 kg m / 0.11 m.
    expect(only(reported(text)).counterweight).toEqual({ mass_g: expect.closeTo(2000, 0), at_mm: [0, 0, -110] });
  });

  it('goes 40 % of the link behind the axis where nothing else is said', () => {
    expect(only(reported(MAST)).counterweight?.at_mm).toEqual([0, 0, -160]);
  });

  it('sees the weights farther out', () => {
    const { joints } = reported(CRANE, { distanceMm: 100 });
    expect(joints.map(({ joint }) => joint)).toEqual(['elbow', 'shoulder']);
    // About the elbow: 0.1 * 0.1 = 0.01 kg m empty, 0.02 full: 150 g at 100 mm. About the shoulder, in every pose: 0.2 * 0.15 +
    // 0.3 m * (0.1 + 0.15 and half of 0.05 kg) = 0.1125 kg m: 1125 g.
    expect(joints.map(({ counterweight }) => counterweight?.mass_g)).toEqual([
      expect.closeTo(150, 0),
      expect.closeTo(1125, 0),
    ]);
  });

  it('is found for the joints that are asked for', () => {
    expect(reported(CRANE, { only: ['shoulder'] }).joints.map(({ joint }) => joint)).toEqual(['shoulder']);
  });

  it('helps no joint about the vertical', () => {
    const turning = edited(MAST, ['axis: y', 'axis: z']);
    const report = reported(turning);
    expect(report).toMatchObject({ joints: [], idle: ['shoulder'] });
    expect(balanceLines(report)).toEqual([
      'stork: no weight helps shoulder: nothing pulls there, or all is in balance',
    ]);
  });
});

describe('the spring instead', () => {
  it('has the stiffness m g L / (a b), and is exact on a first axis', () => {
    // The balance of a zero-length spring with a fixed anchor: k = m g L / (a b), here with 0.22 kg m and a = b = 100 mm.
    const { spring, after_nm } = only(reported(MAST, { distanceMm: 100 }));
    expect(spring).toMatchObject({ free_mm: 0, from_mm: [0, 0, 100], to_mm: [0, 0, 100], fixed: true });
    expect(spring?.n_per_mm).toBeCloseTo((0.22 * G) / 0.01 / 1000, 3);
    // It leaves what the payload's coming and going leaves, as the weight does.
    expect(spring?.after_nm).toBeCloseTo(after_nm, 2);
  });

  it('is held where it is asked', () => {
    const { spring } = only(reported(MAST, { springAboveMm: 50, springAlongMm: 200, springFreeMm: 20 }));
    expect(spring).toMatchObject({ from_mm: [0, 0, 50], to_mm: [0, 0, 200], free_mm: 20 });
  });

  it('says that it is not exact where its fixed end turns', () => {
    const springs = reported(CRANE).joints.map(({ joint, spring }) => [joint, spring?.fixed]);
    expect(springs).toEqual([
      ['elbow', false],
      ['shoulder', true],
    ]);
  });
});

describe('what balancing costs', () => {
  it('is mass on the bearing, inertia, and acceleration that is left', () => {
    const { cost } = reported(MAST, { distanceMm: 100 });
    expect(cost.moving_mass_g).toEqual([expect.closeTo(1100, 6), expect.closeTo(3300, 0)]);
    const [shoulder] = cost.joints;
    // A rod about its end, 1 * 0.4^2 / 3, and the payload, 0.1 * 0.4^2: 0.0693; the weight adds 2.2 * 0.1^2.
    expect(shoulder?.inertia_kg_m2).toEqual([
      expect.closeTo(0.16 / 3 + 0.016, 6),
      expect.closeTo(0.16 / 3 + 0.016 + 0.022, 4),
    ]);
    // 10 Nm * 0.5, less the load, over the inertia; the profile asks for 240.
    const leftDeg = ((5 - G * 0.24 * Math.sin((85 * Math.PI) / 180)) / (0.16 / 3 + 0.016)) * (180 / Math.PI);
    expect(shoulder?.accel_left_deg_s2?.[0]).toBeCloseTo(leftDeg, 2);
    expect(shoulder?.accel_left_deg_s2?.[1]).toBeGreaterThan(leftDeg);
    expect(shoulder?.accel_deg_s2).toBeCloseTo(240, 9);
    expect(cost.tipping_nm).toBeNull();
  });

  it('changes how the base stands', () => {
    const [was, is] = reported(CRANE, { distanceMm: 100 }).cost.tipping_nm ?? [];
    // About the front edge: 0.1 * 2.35 - 0.0947 kg m as the check finds it.
    expect(was).toBeCloseTo(G * (0.235 - 0.075 * Math.sin((85 * Math.PI) / 180) - 0.02), 4);
    expect(is).toBeGreaterThan(was ?? 0);
  });
});

describe('what can be balanced', () => {
  it('is a leader too, over the travel of its pots', () => {
    const hand = `leader: hand
port: sim:hand
wire: frames
joints: [{ name: shoulder, channel: 0, points: [[0, -90], [1000, 90]], travel_counts: [500, 1000] }]
arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 200], mass_g: 50 }] }
`;
    const subject = subjectIn(hand);
    expect([...subject.minRad, ...subject.maxRad]).toEqual([expect.closeTo(0, 12), expect.closeTo(Math.PI / 2, 12)]);
    const report = balanceReport(subject, PLAIN);
    expect(report.cost.joints[0]).toMatchObject({ accel_left_deg_s2: null, accel_deg_s2: null });
    expect(only(report).after_nm).toBeLessThan(1e-4);
  });

  it.each([
    [STORK, 'there is no arm: to balance; give its links with their masses'],
    [edited(MAST, [', mass_g: 1000', '']), 'the link of shoulder has no mass_g; weigh it, in grams'],
  ])('is nothing without an arm and its masses', (text, sentence) => {
    const loaded = loadProfile('arm.yaml', fromMemory({ 'arm.yaml': text }));
    if ('mistakes' in loaded || loaded.kind === 'rig') throw new Error('no profile');
    expect(balanceSubject(loaded)).toBe(sentence);
  });
});
