import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { stringify } from 'yaml';
import { reportOf } from '../../src/check/report.ts';
import { reportDrawing } from '../../src/check/drawing.ts';
import { reportLines } from '../../src/check/text.ts';
import { loadRig } from '../../src/rig/load.ts';
import { fromMemory } from '../rig/memory.ts';
import { CRANE_RIG } from './crane.ts';

const length = fc.constantFrom(0, 1, 40, 250, 900);
const place = fc.tuple(fc.constantFrom(0, 0, -30), fc.constantFrom(0, 0, 20), length);
const link = fc.record(
  {
    axis: fc.constantFrom<unknown>('x', 'y', 'z', [1, 2, -2]),
    to_mm: place,
    mass_g: fc.constantFrom(1, 50, 3000),
    motor: fc.constantFrom({ stall_nm: 0.1 }, { stall_nm: 5, stall_a: 2 }),
    drag_nm: fc.constantFrom(0, 0.5),
    counterweight: fc.record({ mass_g: fc.constant(100), at_mm: place }),
    cable: fc.constant({ nm_per_deg: 0.01, free_deg: 5 }),
  },
  { requiredKeys: ['axis', 'to_mm'] },
);
const base = fc.record(
  {
    height_mm: fc.constantFrom(0, 300, 2500),
    tilt_deg: fc.constantFrom([0, 0], [180, 0], [0, 90]),
    mass_g: fc.constantFrom(100, 9000),
    footprint_mm: fc.constant([
      [100, 80],
      [-100, 80],
      [0, -120],
    ]),
    friction: fc.constantFrom(0, 0.4),
  },
  { requiredKeys: ['height_mm'] },
);
const rig = fc.record({
  links: fc.array(link, { minLength: 1, maxLength: 3 }),
  base,
  keys: fc.record(
    {
      keep_out: fc.constantFrom(
        [{ below_mm: -100 }],
        [
          {
            box_mm: [
              [20, -400, -50],
              [400, 400, 900],
            ],
          },
        ],
      ),
      tip_speed_mm_s: fc.constantFrom(1, 250),
      follow: fc.constantFrom('joints', 'tip'),
      supply: fc.constant({ volts: 6, amps: 3 }),
      load: fc.constantFrom('warn', 'limit'),
    },
    { requiredKeys: [] },
  ),
  payload: fc.option(fc.constant({ mass_g: 80, at_mm: [0, 0, 30] }), { nil: undefined }),
});

/** A rig with an arm of these links; joints take turns to copy the leader's two. */
function filesOf({ links, base: ground, keys, payload }: typeof rig extends fc.Arbitrary<infer T> ? T : never) {
  const joints = links.map((_, i) => ({
    name: `j${i}`,
    from: i % 2 === 0 ? 'shoulder' : 'elbow',
    range_deg: [-60 + 5 * i, 80],
    speed_deg_s: 60,
    accel_deg_s2: 240,
    servo: {
      channel: i,
      points: [
        [-90, 560],
        [90, 2440],
      ],
    },
  }));
  const arm = {
    base: ground,
    links: links.map((one, i) => ({ joint: `j${i}`, ...one })),
    ...(payload === undefined ? {} : { payload }),
  };
  return {
    'rig.yaml': CRANE_RIG,
    'stork.yaml': stringify(
      { follower: 'stork', port: 'sim:arm', wire: 'frames', ...keys, joints, arm },
      { aliasDuplicateObjects: false },
    ),
  };
}

/** Every number in a value, with the way to it. */
function numbers(value: unknown, path: string): readonly (readonly [string, number])[] {
  if (typeof value === 'number') return [[path, value]];
  if (typeof value !== 'object' || value === null) return [];
  return Object.entries(value).flatMap(([key, inner]) => numbers(inner, `${path}.${key}`));
}

describe('whatever arm a file gives', () => {
  it('is reported in finite numbers and drawn, and no share, speed or margin contradicts another', () => {
    let reported = 0;
    fc.assert(
      fc.property(rig, (given) => {
        const loaded = loadRig('rig.yaml', fromMemory(filesOf(given)));
        if ('mistakes' in loaded) return;
        reported++;
        const report = reportOf(loaded);
        expect(numbers(report, '').filter(([, value]) => !Number.isFinite(value))).toEqual([]);
        expect(reportLines(report).join('\n')).not.toMatch(/NaN|Infinity|undefined/);
        expect(reportDrawing(loaded, report)).not.toMatch(/NaN|Infinity|undefined/);
        const [stork] = report.followers;
        expect(stork?.end_speed_max_mm_s).toBeLessThanOrEqual(stork?.end_speed_cap_mm_s ?? Number.POSITIVE_INFINITY);
        expect(stork?.tipping_margin_nm ?? 0).toBeLessThanOrEqual((stork?.tipping_static_nm ?? 0) + 1e-6);
        for (const joint of stork?.joints ?? []) {
          expect(joint.followed_share ?? 0).toBeLessThanOrEqual(1);
          expect(joint.load_worst_nm ?? 0).toBeLessThanOrEqual((joint.moving_worst_nm ?? 0) + 1e-6);
          expect(joint.load_worst_nm).toBe(
            joint.load_worst_nm === null ? null : Math.max(joint.load_empty_nm ?? 0, joint.load_full_nm ?? 0),
          );
          expect(joint.tip_lever_mm ?? 0).toBeLessThanOrEqual((joint.lever_mm ?? 0) + 1e-3);
        }
      }),
      { numRuns: 12 },
    );
    // Otherwise nothing was looked at.
    expect(reported).toBeGreaterThan(0);
  }, 60_000);
});
