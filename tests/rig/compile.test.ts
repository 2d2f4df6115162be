import { describe, expect, it } from 'vitest';
import { edited, RIG, rigIn, STORK } from './memory.ts';

const RAD = Math.PI / 180;
const plain = rigIn({ 'rig.yaml': RIG, 'stork.yaml': STORK }).rig;

function rigWith(rig: readonly (readonly [string, string])[], stork: readonly (readonly [string, string])[] = []) {
  return rigIn({ 'rig.yaml': edited(RIG, ...rig), 'stork.yaml': edited(STORK, ...stork) }).rig;
}

describe('a compiled leader', () => {
  const { leader } = plain.plan;

  it('has its joints in order, then its buttons, as inputs', () => {
    expect(leader.joints.map(({ name, input }) => [name, input])).toEqual([
      ['shoulder', 0],
      ['elbow', 1],
    ]);
    expect(leader.buttons).toEqual([{ name: 'pedal', input: 2, pressed: 'below', counts: 300, does: 'enable' }]);
    expect(plain.boards[0]?.plan.inputs).toEqual({
      channels: [1, 2, 6],
      names: ['shoulder', 'elbow', 'pedal'],
      samplingMs: 10,
    });
  });

  it('maps counts to radians and goes on straight beyond its outer points', () => {
    const map = leader.joints[0]?.map;
    // [112, -120] to [512, 0]: 120 degrees over 400 counts.
    expect(map?.value(112)).toBeCloseTo(-120 * RAD, 12);
    expect(map?.value(312)).toBeCloseTo(-60 * RAD, 12);
    expect(map?.value(12)).toBeCloseTo(-150 * RAD, 12);
  });

  it('travels between its outer points, or where travel_counts says', () => {
    expect(leader.joints.map(({ travelMin, travelMax }) => [travelMin, travelMax])).toEqual([
      [112, 911],
      [120, 880],
    ]);
  });

  it('takes points that are listed from the upper end', () => {
    const turned = rigWith([['[[112, -120], [512, 0], [911, 120]]', '[[911, 120], [512, 0], [112, -120]]']]);
    expect(turned.plan.leader.joints[0]?.map.value(312)).toBeCloseTo(-60 * RAD, 12);
  });

  it('is conditioned in hertz per radian, where the file says hertz per degree', () => {
    const smooth = '{ cutoff_hz: 1.5, beta_hz_per_deg_s: 0.08, slope_cutoff_hz: 2 }';
    const rig = rigWith([['      despike: 3\n', `      despike: 5\n      smooth: ${smooth}\n`]]);
    const [shoulder, elbow] = rig.plan.leader.joints;
    expect(shoulder?.despike).toBe(5);
    expect(shoulder?.smooth?.cutoffHz).toBe(1.5);
    expect(shoulder?.smooth?.slopeCutoffHz).toBe(2);
    // A degree is pi/180 radians: at 1 rad/s the cutoff rises by 0.08 * 180 / pi.
    expect(shoulder?.smooth?.betaHzPerRadS).toBeCloseTo((0.08 * 180) / Math.PI, 12);
    expect(elbow?.smooth).toBeNull();
  });

  it('runs out of time after timeout_ms, and never when its board speaks only on change', () => {
    expect(leader.timeoutUs).toBe(250_000);
    const onChange = rigWith([['wire: lines', 'wire: { lines: { sends: on_change } }']]);
    expect(onChange.plan.leader.timeoutUs).toBe(Number.POSITIVE_INFINITY);
  });
});

describe('a compiled follower', () => {
  const [stork] = plain.plan.followers;

  it('is in radians and microseconds', () => {
    expect(stork?.periodUs).toBe(20_000);
    expect(stork?.joints[0]).toEqual({
      name: 'shoulder',
      sources: [{ joint: 0, weight: 1 }],
      gain: 1,
      offsetRad: 0,
      minRad: -60 * RAD,
      maxRad: 85 * RAD,
      deadbandRad: 0,
      speedRadS: 60 * RAD,
      accelRadS2: 240 * RAD,
      restRad: -20 * RAD,
    });
  });

  it('rounds its period to whole microseconds', () => {
    // 1 / 333 Hz = 3003.003 us.
    expect(rigWith([], [['rate_hz: 50', 'rate_hz: 333']]).plan.followers[0]?.periodUs).toBe(3003);
  });

  it('knows leader joints by index, with their weights', () => {
    expect(stork?.joints[1]?.sources).toEqual([
      { joint: 1, weight: 1 },
      { joint: 0, weight: -0.5 },
    ]);
  });

  it('has a signed gain: direction times gain', () => {
    const turned = rigWith(
      [],
      [['    from: shoulder\n', '    from: shoulder\n    gain: 0.5\n    direction: reversed\n    offset_deg: 12\n']],
    );
    const [joint] = turned.plan.followers[0]?.joints ?? [];
    expect(joint?.gain).toBe(-0.5);
    expect(joint?.offsetRad).toBeCloseTo(12 * RAD, 12);
  });

  it.each([
    ['same', -60, 85],
    ['reversed', 85, -60],
  ])('lays the travel of its leader joint over its range when stretched, %s', (direction, low, high) => {
    const keys = `    from: elbow\n    stretch: true\n    direction: ${direction}\n    gain: 3\n    offset_deg: 40\n`;
    const joint = rigWith([], [['    from: shoulder\n', keys]]).plan.followers[0]?.joints[0];
    // Elbow points [100, -90], [900, 90]: 0.225 degrees a count; travel [120, 880] is -85.5 to 85.5 degrees.
    for (const [leaderDeg, followerDeg] of [
      [-85.5, low],
      [85.5, high],
    ] as const) {
      expect((joint?.gain ?? 0) * leaderDeg * RAD + (joint?.offsetRad ?? 0)).toBeCloseTo(followerDeg * RAD, 12);
    }
  });

  it('drives its joints’ own servos in joint order, then the coupled ones', () => {
    expect(stork?.servos.map(({ channel, turns }) => [channel, turns])).toEqual([
      [5, [{ joint: 0, weight: 1 }]],
      [7, [{ joint: 1, weight: 1 }]],
    ]);
    expect(plain.boards[1]?.plan.outputs[0]).toEqual({
      follower: 'stork',
      joints: ['shoulder', 'elbow'],
      servos: [
        { channel: 5, minUs: 560, maxUs: 2440, joint: 'shoulder' },
        { channel: 7, minUs: 560, maxUs: 2440, joint: 'elbow' },
      ],
      power: null,
    });
  });

  it('maps radians to pulses and stays at its outer points', () => {
    const map = stork?.servos[0]?.map;
    expect(map?.value(0)).toBeCloseTo(1500, 9);
    // 1880 us over 180 degrees: 45 degrees are 470 us.
    expect(map?.value(45 * RAD)).toBeCloseTo(1970, 9);
    expect(map?.value(100 * RAD)).toBe(2440);
    expect(map?.value(-100 * RAD)).toBe(560);
  });

  it('holds poses in joint order, with rest for the joints that a pose leaves out', () => {
    const rig = rigWith([], [['{ bow: { shoulder: 40, elbow: -30 } }', '{ bow: { elbow: -30 } }']]);
    expect([...(rig.plan.followers[0]?.poses ?? [])]).toEqual([['bow', Float64Array.of(-20 * RAD, -30 * RAD)]]);
  });

  it.each([
    ['an arm of unknown size', '', 'ask'],
    [
      'an arm that reaches 299 mm',
      'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 199] }, { joint: elbow, axis: y, to_mm: [0, 60, 80] }] }\n',
      'rest',
    ],
    [
      'an arm that reaches 300 mm',
      'arm: { links: [{ joint: shoulder, axis: y, to_mm: [0, 0, 200] }, { joint: elbow, axis: y, to_mm: [0, 60, 80] }] }\n',
      'ask',
    ],
    ['a small arm that says so', 'wake: last\narm: { links: [{ joint: elbow, axis: y, to_mm: [0, 0, 9] }] }\n', 'last'],
  ])('wakes %s as it should', (_what, keys, wake) => {
    expect(rigWith([], [['poses:', `${keys}poses:`]]).plan.followers[0]?.wake).toBe(wake);
  });

  it('switches power through a channel, or on lines through texts', () => {
    const byChannel = rigWith([], [['stop_category: 2', 'stop_category: 1\npower: { channel: 9, on: low }']]);
    expect(byChannel.plan.followers[0]).toMatchObject({ stopCategory: 1, hasPower: true });
    expect(byChannel.boards[1]?.plan.outputs[0]?.power).toEqual({ channel: 9, on: 'low' });
    const texts = 'template: "{shoulder.us},{elbow.us}\\n", power_on: "P1\\n", power_off: "P0\\n"';
    const byText = rigWith(
      [],
      [
        ['wire: firmata', `wire: { lines: { ${texts} } }`],
        ['stop_category: 2', 'stop_category: 0'],
      ],
    );
    expect(byText.plan.followers[0]).toMatchObject({ stopCategory: 0, hasPower: true });
    expect(byText.boards[1]?.plan.outputs[0]).toMatchObject({
      power: expect.anything(),
      lines: { template: '{shoulder.us},{elbow.us}\n', limp: null, powerOn: 'P1\n', powerOff: 'P0\n' },
    });
  });
});

describe('a compiled rig', () => {
  it('keeps step and pace as shares', () => {
    expect(plain.plan).toMatchObject({ unison: false, pace: 1 });
    expect(rigWith([['rig: yard', 'rig: yard\nunison: true\npace: 25']]).plan).toMatchObject({
      unison: true,
      pace: 0.25,
    });
  });

  it('opens one board a port, the leader’s first, with the baud rate that its wire assumes', () => {
    const rig = rigWith([['hand?baud=115200', 'hand']], [['?baud=57600', '']]);
    expect(
      rig.boards.map(({ address, wire, leads, followers }) => ({ address, wire: wire.name, leads, followers })),
    ).toEqual([
      {
        address: { kind: 'serial', text: 'serial:/dev/hand', path: '/dev/hand', baud: 115_200 },
        wire: 'lines',
        leads: true,
        followers: [],
      },
      {
        address: { kind: 'serial', text: 'serial:/dev/stork', path: '/dev/stork', baud: 57_600 },
        wire: 'firmata',
        leads: false,
        followers: [0],
      },
    ]);
  });

  it('opens a board that carries both ends once, however its address is written', () => {
    const one = rigWith([
      ['serial:/dev/hand?baud=115200', 'serial:/dev/stork'],
      ['wire: lines', 'wire: firmata\n  board: uno'],
    ]);
    expect(one.boards).toHaveLength(1);
    expect(one.boards[0]).toMatchObject({
      wire: { name: 'firmata' },
      leads: true,
      followers: [0],
      plan: { boardName: 'uno', inputs: { channels: [1, 2, 6] }, outputs: [{ follower: 'stork' }] },
    });
  });

  it('reads line options as what most sketches do where they are absent', () => {
    expect(plain.boards[0]?.wire).toEqual({
      name: 'lines',
      lines: {
        separator: null,
        sends: 'always',
        checksum: null,
        template: null,
        limp: null,
        powerOn: null,
        powerOff: null,
      },
    });
    const lines = '{ lines: { separator: ";", checksum: xor } }';
    expect(rigWith([['wire: lines', `wire: ${lines}`]]).boards[0]?.wire).toMatchObject({
      lines: { separator: ';', checksum: 'xor' },
    });
  });
});
