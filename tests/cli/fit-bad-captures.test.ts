import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import { rmSync } from 'node:fs';
import { FIT_CODES } from '../../src/fit/problems.ts';
import { fitDesk, HEADER, LEADER, points, WREN } from './fit-desk.ts';

const desk = fitDesk();
const { fit, read, there } = desk;
beforeEach(() => desk.lay());
afterAll(() => desk.remove());

/** Captures that cannot be fitted, the code each is told by, and what is said. */
const WRAPPING = Array.from({ length: 400 }, (_, i) => `leader-sweep,stick,base,${(600 + 2 * i) % 1024},,\n`).join('');
const TREMBLING = Array.from({ length: 60 }, (_, i) => `leader-still,stick,base,${i % 2 === 0 ? 300 : 700},,\n`).join(
  '',
);
const BAD: readonly (readonly [keyof typeof FIT_CODES, string, RegExp])[] = [
  ['FIT_FEW_POINTS', 'leader-point,stick,base,500,,0\n', /one point makes no map/],
  ['FIT_COINCIDENT', 'leader-point,stick,base,500,,0\nleader-point,stick,base,500,,10\n', /same counts/],
  ['FIT_FLAT', 'leader-point,stick,base,100,,0\nleader-point,stick,base,900,,0\n', /same angle/],
  [
    'FIT_TURNS_BACK',
    [100, 200, 300, 400, 500, 600, 700, 800, 900]
      .map((c, i) => `leader-point,stick,base,${c},,${[0, 30, 55, 75, 90, 96, 92, 80, 60][i]}\n`)
      .join(''),
    /turn back near/,
  ],
  [
    'FIT_WRONG_POINTS',
    points('base') + points('base').replace(/,0\n/, ',80\n').replace(/,75\n/, ',-20\n'),
    /both stand out/,
  ],
  ['FIT_WRAPS', WRAPPING + points('base'), /end of its track/],
  ['FIT_NEVER_STILL', TREMBLING + points('base'), /at rest it reads/],
  ['FIT_UNKNOWN_ARM', 'leader-point,stack,base,500,,0\n', /the rig has stick, wren/],
  ['FIT_UNKNOWN_JOINT', 'leader-point,stick,knee,500,,0\n', /stick has base, elbow/],
  ['FIT_WEIGHTED', 'match,wren,elbow,100,700,\nmatch,wren,elbow,900,2300,\n', /copies no single joint/],
  ['FIT_NOT_HERE', 'servo-point,wren,base,,700,-80\nservo-point,wren,base,,2300,80\n', /for others too/],
];

describe('Bad captures', () => {
  it.each(BAD)('are told by %s, and nothing is written', (code, captures, words) => {
    const before = there();
    const { status, err } = fit(HEADER + captures);
    expect(err).toMatch(words);
    expect(err).toContain(FIT_CODES[code]);
    expect(err).toContain(`(${code})`);
    expect(err).toContain('Nothing was written.');
    expect(status).toBe(2);
    expect([read('leader.yaml'), read('wren.yaml')]).toEqual([LEADER, WREN]);
    expect(there()).toEqual([...before, 'captures.csv'].sort());
  });

  it.each([
    [
      'FIT_NO_SERVO',
      'servo-point,wren,base,,700,-80\nservo-point,wren,base,,2300,80\n',
      /no servo turns this joint alone/,
      (text: string) =>
        text
          .replace('{base.us}', '{0.us},{2.us}')
          .replace(', servo: { channel: 0, points: [[-90, 600], [90, 2400]] }', '')
          .concat(
            'servos:\n  - { channel: 0, turns: { base: 1 }, points: [[-90, 600], [90, 2400]] }\n' +
              '  - { channel: 2, turns: { base: 1 }, points: [[-90, 2400], [90, 600]] }\n',
          ),
    ],
    [
      'FIT_STRETCHED',
      'match,wren,base,100,700,\nmatch,wren,base,900,2300,\n',
      /it is stretched over its range/,
      (text: string) => text.replace('from: base,', 'from: base, stretch: true,'),
    ],
  ] as const)('of a follower that cannot be fitted so are told by %s', (code, captures, words, profile) => {
    desk.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
    const text = profile(WREN);
    desk.write('wren.yaml', text);
    const { status, err } = fit(HEADER + captures);
    expect(err).toMatch(words);
    expect(err).toContain(`${FIT_CODES[code]} (${code})`);
    expect(status).toBe(2);
    expect(read('wren.yaml')).toBe(text);
  });

  it('that are none are no fit', () => {
    for (const from of [{}, { from: undefined, check: desk.path('captures.csv') }]) {
      const { status, err } = fit(HEADER, from);
      expect(err).toMatch(/captures\.csv: there are no captures in it; measure some first/);
      expect(status).toBe(2);
    }
    rmSync(desk.path('captures.csv'));
    const missing = fit(HEADER, { from: desk.path('nowhere.csv') });
    expect(missing.err).toMatch(/nowhere\.csv: there is no such file; name a file of captures/);
    expect(missing.status).toBe(2);
  });

  it('keep nothing from being written with --partly but the joint that they spoil', () => {
    const { status } = fit(`${HEADER}leader-point,stick,elbow,500,,0\n${points('base')}`, { partly: true });
    expect(status).toBe(1);
    expect(read('leader.yaml')).toContain('method: straight');
    expect(read('leader.yaml')).toContain(
      '{ name: elbow, channel: 1, points: [[100, -100], [900, 100]], travel_counts: [90, 910] }',
    );
  });

  it.each([
    ['step,arm,joint,counts,pulse_us\n', /captures\.csv:1:1: column known_deg is missing/],
    [
      `${HEADER}leader-pint,stick,base,1,,2\n`,
      /captures\.csv:2:1: there is no step "leader-pint"; did you mean leader-point\?/,
    ],
    [`${HEADER}leader-point,stick,base,1,,\n`, /captures\.csv:2:\d+: a leader-point needs known_deg/],
    [`${HEADER}leader-point,stick,base,one,,2\n`, /captures\.csv:2:25: "one" is no number/],
    [
      'step,arm,joint,counts,pulse_us,known_deg,moved\nservo-step,wren,base,,1500,,yes\n',
      /captures\.csv:2:29: "yes" is no number/,
    ],
    [
      'step,arm,joint,counts,pulse_us,known_deg,moved\nservo-step,wren,base,,1500,,2\n',
      /captures\.csv:2:29: "2" is neither 1 nor 0/,
    ],
    [`${HEADER}servo-step,wren,base,,1500,\n`, /captures\.csv:2:1: a servo-step needs moved/],
    [`${HEADER}leader-point,stick,base,1\n`, /captures\.csv:2:1: 4 cells under 6 columns/],
  ])('that cannot be read are told with their place (%#)', (text, words) => {
    const { status, err } = fit(text);
    expect(err).toMatch(words);
    expect(status).toBe(2);
  });

  it('leave every file alone when the rig would have a mistake as fitted', () => {
    // 700 to 2300 us come out as 50 degrees in all: less than the joint's range.
    desk.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
    const { status, err } = fit(
      `${HEADER}servo-point,wren,base,,700,-25\nservo-point,wren,base,,1500,0\nservo-point,wren,base,,2300,25\n`,
    );
    expect(err).toMatch(/wren\.yaml:\d+:\d+: joints\[0\]/);
    expect(status).toBe(1);
    expect(read('wren.yaml')).toBe(WREN);
  });
});
