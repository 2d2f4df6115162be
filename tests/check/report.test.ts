import { describe, expect, it } from 'vitest';
import { armMotion, jointMotions } from '../../src/check/motion.ts';
import { looking } from '../../src/check/looking.ts';
import { reportOf } from '../../src/check/report.ts';
import { edited, rigIn } from '../rig/memory.ts';
import { CRANE, CRANE_RIG, crane, craneReport, joint } from './crane.ts';
import { loadProfile } from '../../src/rig/load.ts';
import { fromMemory } from '../rig/memory.ts';

/** Standard gravity, 3rd CGPM 1901. */
const G = 9.80665;
const RAD = Math.PI / 180;
const SIN85 = Math.sin(85 * RAD);

describe('the size of an arm', () => {
  it('is its reach, the ratio to the leader’s, and the square root of that in time', () => {
    // 300 + 200 mm against 150 + 100 mm.
    expect(crane()).toMatchObject({
      reach_mm: expect.closeTo(500, 9),
      scale: expect.closeTo(2, 12),
      time_factor: expect.closeTo(Math.SQRT2, 8),
    });
  });

  it('is not known where no file gives it', () => {
    const bare = crane(
      [],
      [
        [
          '  arm:\n    links:\n      - { joint: shoulder, axis: y, to_mm: [0, 0, 150] }\n      - { joint: elbow, axis: y, to_mm: [0, 0, 100] }\n',
          '',
        ],
      ],
    );
    expect(bare).toMatchObject({ reach_mm: expect.closeTo(500, 9), scale: null, time_factor: null });
  });
});

describe('the share of the leader’s travel that a joint follows', () => {
  it('is what lies inside its range', () => {
    // Leader -120 to 120 degrees, range -60 to 85: 145 of 240, with 60 below and 35 above.
    expect(joint('shoulder')).toMatchObject({
      followed_share: expect.closeTo(145 / 240, 9),
      clipped_deg: [expect.closeTo(60, 9), expect.closeTo(35, 9)],
      range_used_share: 1,
      servo_span_deg: 180,
    });
  });

  it('is that of all a weighted sum can ask', () => {
    // Elbow 0.225 degrees a count, travel 120 to 880 of 100 to 900: -85.5 to 85.5; minus half of -120 to 120: -145.5 to
    // 145.5. Range -50 to 5: 55 of 291.
    expect(joint('elbow').followed_share).toBeCloseTo(55 / 291, 9);
  });

  it('turns round with the joint', () => {
    const { clipped_deg } = joint('shoulder', [
      ['    from: shoulder\n', '    from: shoulder\n    direction: reversed\n    gain: 0.5\n    offset_deg: 40\n'],
    ]);
    // -120 to 120 reversed, halved and moved by 40: -20 to 100; the range ends at 85.
    expect(clipped_deg).toEqual([0, expect.closeTo(15, 9)]);
  });

  it('says that part of the range is not used', () => {
    const halved = joint('shoulder', [['    from: shoulder\n', '    from: shoulder\n    gain: 0.25\n']]);
    // -30 to 30 of -60 to 85.
    expect(halved).toMatchObject({
      followed_share: 1,
      clipped_deg: [0, 0],
      range_used_share: expect.closeTo(60 / 145, 9),
    });
  });

  it('is not known of a joint that copies nothing', () => {
    const still = joint('shoulder', [['    from: shoulder\n', '']]);
    expect(still).toMatchObject({ followed_share: null, clipped_deg: null, count_deg: null, mm_per_count: null });
  });

  it('is told of a servo that falls short of half a turn', () => {
    const short = '[[-80, 560], [80, 2440]]';
    const { warnings } = craneReport([
      ['servo: { channel: 5, points: [[-90, 560], [90, 2440]] }', `servo: { channel: 5, points: ${short} }`],
      ['range_deg: [-60, 85]', 'range_deg: [-80, 80]'],
    ]);
    expect(warnings).toContain(
      "stork: shoulder clips the leader's travel where its servo ends, after 160 degrees, short of 180 as servos often are",
    );
  });
});

describe('the chain from a count to the tip', () => {
  it('takes the steepest step of the pot, and the longest arm', () => {
    // 120 degrees over 911 - 512 = 399 counts are steeper than over 400; the tip is at most 500 mm from the shoulder.
    const { count_deg, mm_per_count } = joint('shoulder');
    expect(count_deg).toBeCloseTo(120 / 399, 9);
    expect(mm_per_count).toBeCloseTo((120 / 399) * RAD * 500, 3);
  });

  it('knows the noise of rounding as a step by the square root of 12', () => {
    // W. Kester, "Taking the Mystery out of the Infamous Formula", Analog Devices MT-001.
    const { quantisation_deg, noise_deg } = joint('shoulder');
    expect(quantisation_deg).toBeCloseTo(120 / 399 / Math.sqrt(12), 9);
    // Nobody has measured the pot: it is at least this noisy.
    expect(noise_deg).toBe(quantisation_deg);
  });

  it('adds independent noises by their squares', () => {
    // One degree of the leader's elbow is 1 of the follower's, one of its shoulder half a one.
    const { quantisation_deg } = joint('elbow');
    expect(quantisation_deg).toBeCloseTo(Math.hypot(180 / 800, 0.5 * (120 / 399)) / Math.sqrt(12), 9);
  });

  it('takes the pot’s noise as measured, and what smoothing leaves of it', () => {
    const { noise_deg, smoothed_deg } = joint(
      'shoulder',
      [],
      [['      despike: 3\n', '      despike: 3\n      noise_counts: 2\n      smooth: { cutoff_hz: 1.5 }\n']],
    );
    expect(noise_deg).toBeCloseTo(2 * (120 / 399), 9);
    // At 100 readings a second (sampling_ms 10): share 1 / (1 + 100 / (2 pi 1.5)) = 0.08613 of each reading; an
    // exponential average of white noise leaves sqrt(0.08613 / 1.91387) = 0.21214 of it.
    expect((smoothed_deg ?? 0) / (noise_deg ?? 0)).toBeCloseTo(0.21214, 4);
  });

  it('knows what the wire rounds to, and the servo’s own deadband', () => {
    const deadband: readonly [string, string] = [
      'points: [[-90, 560], [90, 2440]] }\n  - name',
      'points: [[-90, 560], [90, 2440]], deadband_us: 4 }\n  - name',
    ];
    // 180 degrees over 1880 us; Firmata sends whole microseconds.
    expect(joint('shoulder', [deadband])).toMatchObject({
      wire_deg: expect.closeTo(180 / 1880, 9),
      servo_deg: expect.closeTo((4 * 180) / 1880, 9),
      servo_mm: expect.closeTo(((4 * 180) / 1880) * RAD * 500, 3),
      resolution_worst: 'servo',
    });
  });

  it.each([
    ['wire: frames', 180 / 1880 / 8],
    ['wire: { lines: { template: "{shoulder.us:2},{elbow.us}\\n" } }', 180 / 1880 / 100],
    ['wire: { lines: { template: "{shoulder.deg:1},{elbow.us}\\n" } }', 0.1],
  ])('knows what %s rounds to', (wire, step) => {
    expect(joint('shoulder', [['wire: firmata', wire]]).wire_deg).toBeCloseTo(step, 9);
  });

  it('says which link is worst', () => {
    // A count moves 0.3 degrees, a microsecond 0.1, and nothing else stands in the way.
    expect(joint('shoulder').resolution_worst).toBe('count');
    expect(joint('shoulder', [['    from: shoulder\n', '    from: shoulder\n    deadband_deg: 2\n']])).toMatchObject({
      resolution_worst: 'deadband',
      deadband_mm: expect.closeTo(2 * RAD * 500, 3),
    });
    expect(
      joint('shoulder', [], [['      despike: 3\n', '      despike: 3\n      noise_counts: 5\n']]).resolution_worst,
    ).toBe('noise');
  });
});

function specOf() {
  const [spec] = rigIn({ 'rig.yaml': CRANE_RIG, 'stork.yaml': CRANE }).rig.plan.followers;
  if (spec?.whole === undefined) throw new Error('no arm');
  return { whole: spec.whole, joints: spec.joints };
}

describe('how fast and how far an arm goes on', () => {
  it('stops a joint within v^2 / 2A', () => {
    // 60^2 / (2 * 240) = 7.5 degrees; 500 and 200 mm of arm.
    expect(joint('shoulder')).toMatchObject({
      stopping_deg: 7.5,
      lever_mm: expect.closeTo(500, 2),
      stopping_mm: expect.closeTo(7.5 * RAD * 500, 2),
    });
    expect(joint('elbow').stopping_mm).toBeCloseTo(7.5 * RAD * 200, 3);
    expect(crane().stopping_mm).toBeCloseTo(7.5 * RAD * 700, 2);
  });

  it('has its fastest link end where the arm is straight and both joints turn one way', () => {
    // 60 deg/s about the shoulder, 500 mm away, and about the elbow, 200 mm away.
    const { end_speed_max_mm_s, end_speed_cap_mm_s, end_speed_pose_deg } = crane();
    expect(end_speed_max_mm_s).toBeCloseTo(60 * RAD * 700, 2);
    expect(end_speed_cap_mm_s).toBeNull();
    expect(end_speed_pose_deg?.[1]).toBeCloseTo(0, 1);
  });

  it('can have an elbow that outruns the tip', () => {
    const { whole, joints } = specOf();
    // Folded back all but straight: the tip is 100 mm from the shoulder, and the elbow 300 mm, at 60 deg/s.
    const folded = joints.map((one, j) =>
      j === 1 ? { ...one, minRad: 179 * RAD, maxRad: 180 * RAD, restRad: 180 * RAD, speedRadS: RAD } : one,
    );
    const look = looking(whole, folded);
    const motion = armMotion(whole, folded, look, jointMotions(folded, whole, look));
    expect(motion.end_speed_max_mm_s).toBeCloseTo(60 * RAD * 300, 3);
  });

  it('is never faster than its cap, which shortens its stop too', () => {
    const spec = specOf();
    const whole = { ...spec.whole, endSpeedMS: 0.25 };
    const look = looking(whole, spec.joints);
    const motion = armMotion(whole, spec.joints, look, jointMotions(spec.joints, whole, look));
    expect(motion).toMatchObject({
      end_speed_max_mm_s: 250,
      end_speed_cap_mm_s: 250,
      end_speed_uncapped_mm_s: expect.closeTo(60 * RAD * 700, 2),
      // Every joint has stopped after 60 / 240 s.
      stopping_mm: 62.5,
    });
  });

  it('is said when it is more than 250 mm/s, without a claim', () => {
    expect(craneReport().warnings).toContainEqual(
      expect.stringMatching(/^stork: it may move at 733 mm\/s, more than 250 mm\/s, .*no conformity is claimed/),
    );
    const slow = craneReport([
      [
        '    speed_deg_s: 60\n    accel_deg_s2: 240\n    rest_deg: -20',
        '    speed_deg_s: 10\n    accel_deg_s2: 240\n    rest_deg: -20',
      ],
    ]);
    // 10 deg/s * 500 mm + 60 deg/s * 200 mm = 297 mm/s.
    expect(slow.followers[0]?.end_speed_max_mm_s).toBeCloseTo(10 * RAD * 500 + 60 * RAD * 200, 2);
  });
});

describe('the load of a joint', () => {
  it('is worst where the arm lies level, with the payload', () => {
    // kg m about the shoulder: 0.2 * 0.15 + 0.1 * 0.3 + 0.05 * 0.3 = 0.075 at 85 degrees, and 0.1 * 0.1 + 0.05 * 0.2 =
    // 0.02 at 90 degrees; without the payload 0.06 and 0.01.
    expect(joint('shoulder')).toMatchObject({
      load_full_nm: expect.closeTo(G * (0.075 * SIN85 + 0.02), 6),
      load_empty_nm: expect.closeTo(G * (0.06 * SIN85 + 0.01), 6),
      load_worst_nm: expect.closeTo(G * (0.075 * SIN85 + 0.02), 6),
      load_worst_with_payload: true,
      // 4 Nm * 0.3 may be held.
      load_share: expect.closeTo((G * (0.075 * SIN85 + 0.02)) / 1.2, 6),
      load_margin_nm: expect.closeTo(1.2 - G * (0.075 * SIN85 + 0.02), 6),
      load_worst_pose_deg: [expect.closeTo(85, 3), expect.closeTo(5, 3)],
    });
  });

  it('can be worst without the payload', () => {
    const heavy = [
      [
        'to_mm: [0, 0, 300], mass_g: 200,',
        'to_mm: [0, 0, 300], mass_g: 200, counterweight: { mass_g: 900, at_mm: [0, 0, -200] },',
      ],
    ] as const;
    // 0.9 * -0.2 = -0.18: the tail is heavier than the arm, with the payload or without: 0.06 + 0.01 - 0.18.
    const { load_worst_nm, load_worst_with_payload } = joint('shoulder', heavy);
    expect(load_worst_with_payload).toBe(false);
    expect(load_worst_nm).toBeGreaterThan(G * (0.12 * SIN85 - 0.01) - 1e-9);
  });

  it('is not looked for where a keep-out never lets the arm go', () => {
    // Forward beyond 250 mm is kept out: the arm may only lie back, to -60 and -30 degrees about the shoulder and all.
    const { load_worst_nm, load_worst_pose_deg } = joint('shoulder', [
      ['rate_hz: 50', 'keep_out: [{ box_mm: [[250, -100, 0], [600, 100, 400]] }]'],
    ]);
    const back = G * (0.075 * Math.sin(60 * RAD) + 0.02);
    expect(load_worst_nm).toBeCloseTo(back, 4);
    expect(load_worst_pose_deg).toEqual([-60, expect.closeTo(-30, 1)]);
  });

  it('shows joints that do not matter at rest', () => {
    // All that the shoulder carries is its own link: the elbow may be anywhere.
    const bare = joint('shoulder', [
      ['    - { joint: elbow, axis: y, to_mm: [0, 0, 200], mass_g: 100, motor: { stall_nm: 1, stall_a: 1 } }\n', ''],
      ['    accel_deg_s2: 240\nservos', '    accel_deg_s2: 240\n    rest_deg: -7\nservos'],
    ]);
    expect(bare.load_worst_pose_deg).toEqual([85, -7]);
  });

  it('adds what it takes to speed up, and drag', () => {
    const one = joint('shoulder', [
      ['    - { joint: elbow, axis: y, to_mm: [0, 0, 200], mass_g: 100, motor: { stall_nm: 1, stall_a: 1 } }\n', ''],
      ['  payload: { mass_g: 50, at_mm: [0, 0, 0] }\n', ''],
    ]);
    // A uniform rod of 0.2 kg and 0.3 m: 0.2 * 0.3^2 / 3 kg m^2 about its end, at 240 deg/s^2.
    const nm = G * 0.2 * 0.15 * SIN85 + 0.006 * 240 * RAD + 0.1;
    expect(one.moving_worst_nm).toBeCloseTo(nm, 6);
    // 4 Nm * 0.5 may be used.
    expect(one.moving_share).toBeCloseTo(nm / 2, 6);
  });

  it('is not known where a link farther out has no mass, nor against a motor that is not given', () => {
    const massless = [['to_mm: [0, 0, 200], mass_g: 100,', 'to_mm: [0, 0, 200],']] as const;
    expect(joint('shoulder', massless)).toMatchObject({ load_worst_nm: null, load_share: null, moving_worst_nm: null });
    const motorless = joint('elbow', [[', motor: { stall_nm: 1, stall_a: 1 } }', ' }']]);
    expect(motorless).toMatchObject({
      load_worst_nm: expect.closeTo(G * 0.02, 6),
      load_share: null,
      moving_share: null,
    });
  });
});

describe('how a base stands', () => {
  it('is least held down where the arm reaches out farthest', () => {
    // About the front edge, 0.1 m ahead: all 2.35 kg at 0.1 m, less the 0.0947 kg m that the arm leans out.
    expect(crane().tipping_static_nm).toBeCloseTo(G * (0.1 * 2.35 - 0.075 * SIN85 - 0.02), 5);
  });

  it('is held down less while the arm speeds up', () => {
    const { tipping_margin_nm, tipping_static_nm, tipping_pose_deg } = crane();
    expect(tipping_margin_nm).toBeLessThan(tipping_static_nm ?? 0);
    expect(tipping_pose_deg).toHaveLength(2);
  });

  it('slides at its weight times friction, less what the arm pushes', () => {
    const { sliding_margin_n } = crane();
    expect(sliding_margin_n).toBeGreaterThan(0);
    expect(sliding_margin_n).toBeLessThan(0.5 * 2.35 * G);
    // An arm that hardly speeds up pushes hardly.
    const gentle = crane([
      [
        '    speed_deg_s: 60\n    accel_deg_s2: 240\n    rest_deg: -20',
        '    speed_deg_s: 0.1\n    accel_deg_s2: 0.1\n    rest_deg: -20',
      ],
      ['    speed_deg_s: 60\n    accel_deg_s2: 240\nservos', '    speed_deg_s: 0.1\n    accel_deg_s2: 0.1\nservos'],
    ]);
    // Without its payload it is lighter, and slides sooner.
    expect(gentle.sliding_margin_n).toBeCloseTo(0.5 * 2.3 * G, 2);
    expect(gentle.tipping_margin_nm).toBeCloseTo(gentle.tipping_static_nm ?? 0, 2);
  });

  it('is not told of a base without a footprint, or one that hangs', () => {
    const none = { tipping_margin_nm: null, tipping_static_nm: null, tipping_pose_deg: null, sliding_margin_n: null };
    expect(
      crane([[', footprint_mm: [[100, 100], [-100, 100], [-100, -100], [100, -100]], friction: 0.5', '']]),
    ).toMatchObject(none);
    expect(crane([['height_mm: 100', 'height_mm: 900, tilt_deg: [180, 0]']])).toMatchObject(none);
    expect(crane([[', friction: 0.5', '']])).toMatchObject({
      tipping_static_nm: expect.any(Number),
      sliding_margin_n: null,
    });
  });
});

describe('the supply', () => {
  it('feeds one that starts while the others hold, all that move, and all at once', () => {
    const shoulderA = (2 * G * (0.075 * SIN85 + 0.02)) / 4;
    const elbowA = G * 0.02;
    expect(crane()).toMatchObject({
      supply_one_by_one_a: expect.closeTo(Math.max(2 + elbowA, 1 + shoulderA), 6),
      supply_worst_a: 3,
      supply_a: 5,
      supply_not_counted: [],
    });
    const [shoulder, elbow] = crane().joints;
    expect(crane().supply_moving_a).toBeCloseTo(
      (2 * (shoulder?.moving_worst_nm ?? 0)) / 4 + (elbow?.moving_worst_nm ?? 0),
      7,
    );
  });

  it('says which joints it leaves out', () => {
    const report = craneReport([['motor: { stall_nm: 1, stall_a: 1 }', 'motor: { stall_nm: 1 }']]);
    expect(report.followers[0]).toMatchObject({ supply_worst_a: 2, supply_not_counted: ['elbow'] });
    expect(report.warnings).toContainEqual(expect.stringContaining('leaves out elbow'));
  });
});

describe('when pulses or power end', () => {
  it.each([
    ['limp', 'the servos go limp: shoulder and elbow give way, and whatever hangs there falls'],
    ['hold', 'the servos hold where they are while they have power'],
    [
      'unknown',
      'what the servos do is not known: if they go limp, shoulder and elbow give way, and whatever hangs there falls',
    ],
  ])('an arm whose servos do this: %s', (on_lost_pulse, pulses_end) => {
    expect(crane([['on_lost_pulse: limp', `on_lost_pulse: ${on_lost_pulse}`]])).toMatchObject({
      pulses_end,
      power_ends: 'no servo holds: shoulder and elbow give way, and whatever hangs there falls',
      falling: ['shoulder', 'elbow'],
    });
  });

  it('stays where drag outweighs the load', () => {
    // Shoulder up to 0.93 Nm, elbow up to 0.196 Nm.
    const stiff = [
      ['drag_nm: 0.1', 'drag_nm: 1'],
      ['motor: { stall_nm: 1, stall_a: 1 }', 'motor: { stall_nm: 1, stall_a: 1 }, drag_nm: 0.2'],
    ] as const;
    expect(crane(stiff)).toMatchObject({
      falling: [],
      power_ends: 'no servo holds: no load outweighs its joint’s drag',
    });
  });

  it('is not known without masses', () => {
    expect(crane([['to_mm: [0, 0, 200], mass_g: 100,', 'to_mm: [0, 0, 200],']])).toMatchObject({
      falling: [],
      falling_unknown: ['shoulder', 'elbow'],
      power_ends: 'no servo holds: of shoulder and elbow it cannot be told',
    });
  });
});

describe('a follower that is looked at alone', () => {
  it('is told all that needs no leader', () => {
    const loaded = loadProfile('stork.yaml', fromMemory({ 'stork.yaml': CRANE }));
    if ('mistakes' in loaded) throw new Error('a mistake in the crane');
    const report = reportOf(loaded);
    const [alone] = report.followers;
    expect(report.leader).toBeNull();
    expect(alone).toMatchObject({ scale: null, time_factor: null, reach_mm: expect.closeTo(500, 9) });
    expect(alone?.joints[0]).toMatchObject({
      followed_share: null,
      count_deg: null,
      wire_deg: expect.closeTo(180 / 1880, 9),
    });
    // The rest is as in its rig.
    const beside = crane();
    expect(alone?.tipping_margin_nm).toBe(beside.tipping_margin_nm);
    expect(alone?.joints.map(({ load_share }) => load_share)).toEqual(
      beside.joints.map(({ load_share }) => load_share),
    );
  });
});

describe('a leader', () => {
  it('says what one count is, and how often its line fits', () => {
    const { leader } = craneReport();
    // Columns up to channel 6, four digits each with six separators, and CR LF: 7 * 5 - 1 + 2 = 36 bytes of 10 bits.
    expect(leader).toMatchObject({
      leader: 'hand',
      reach_mm: expect.closeTo(250, 9),
      readings_hz_max: expect.closeTo(115_200 / 360, 9),
      baud_for_1000_hz: 360_000,
      joints: [
        {
          joint: 'shoulder',
          channel: 1,
          count_deg: expect.closeTo(120 / 399, 9),
          travel_deg: [expect.closeTo(-120, 9), expect.closeTo(120, 9)],
        },
        {
          joint: 'elbow',
          count_deg: expect.closeTo(0.225, 9),
          travel_deg: [expect.closeTo(-85.5, 9), expect.closeTo(85.5, 9)],
        },
      ],
      buttons: [{ button: 'pedal', channel: 6, does: 'enable' }],
    });
  });

  it('knows no such limit of a wire without lines, or a port without a baud rate', () => {
    const frames = edited(CRANE_RIG, ['wire: lines', 'wire: frames']);
    const tcp = edited(CRANE_RIG, ['serial:/dev/hand?baud=115200', 'tcp:there:7000']);
    for (const rig of [frames, tcp]) {
      const { leader } = reportOf(rigIn({ 'rig.yaml': rig, 'stork.yaml': CRANE }));
      expect(leader).toMatchObject({ readings_hz_max: null, baud_for_1000_hz: null });
    }
  });
});
