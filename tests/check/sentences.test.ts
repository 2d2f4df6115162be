import { describe, expect, it } from 'vitest';
import { boardWarnings } from '../../src/check/warnings.ts';
import { overLimits } from '../../src/check/over.ts';
import type { CheckedFollower } from '../../src/check/checked.ts';
import { reportLines } from '../../src/check/text.ts';
import { edited, rigIn } from '../rig/memory.ts';
import { CRANE, CRANE_RIG, crane, craneReport } from './crane.ts';

type Edits = readonly (readonly [string, string])[];

const over = (edits: Edits): readonly string[] => craneReport(edits).over;
const warnings = (edits: Edits, rig: Edits = []): readonly string[] => craneReport(edits, rig).warnings;

describe('what is over its limit', () => {
  it('is nothing of the crane', () => {
    expect(over([])).toEqual([]);
  });

  // Shoulder 9.80665 * (0.075 sin 85 + 0.02) = 0.929 Nm to hold.
  it.each<[string, Edits, RegExp]>([
    [
      'a load to hold',
      [['stall_nm: 4,', 'stall_nm: 3,']],
      /^stork: shoulder has to hold 0\.93 Nm, 103 % of what its motor may hold; balance it/,
    ],
    [
      'a load to move',
      [['stall_nm: 4,', 'stall_nm: 4, use: 0.1,']],
      /^stork: shoulder takes up to 1\.21 Nm to move, 304 % of what its motor may use; lower accel/,
    ],
    // 0.3 kg of base: 0.1 * 0.65 - 0.0947 = -0.0297 kg m, -0.29 Nm.
    [
      'a base that tips',
      [['mass_g: 2000', 'mass_g: 300']],
      /^stork: it tips over by its own weight, by 0\.29 Nm; widen or weight its base$/,
    ],
    [
      'a base that tips as the arm speeds up',
      [['mass_g: 2000', 'mass_g: 620']],
      /^stork: it can tip over as it accelerates, by 0\.\d\d Nm; weight its base/,
    ],
    [
      'a base that slides',
      [['friction: 0.5', 'friction: 0.005']],
      /^stork: its base can slide, by \d\.\d N; weight it/,
    ],
    [
      'a supply that is too small to start on',
      [['amps: 5', 'amps: 2']],
      /^stork: it draws up to 2\.2 A as its servos start one by one, and its supply gives 2\.0 A$/,
    ],
    [
      'a supply that is too small to move on',
      [['amps: 5', 'amps: 0.5']],
      /^stork: it draws up to 0\.\d A as all its joints move, and its supply gives 0\.5 A$/,
    ],
  ])('%s', (_what, edits, sentence) => {
    expect(over(edits)).toContainEqual(expect.stringMatching(sentence));
  });

  it('is not what the governor keeps within its limit', () => {
    const [stork] = rigIn({ 'rig.yaml': CRANE_RIG, 'stork.yaml': CRANE }).profiles.followers;
    if (stork === undefined) throw new Error('no follower');
    const heavy: CheckedFollower = crane([['stall_nm: 4,', 'stall_nm: 1,']]);
    const limited = overLimits({ ...stork, load: 'limit', moving_load: 'limit' }, heavy);
    expect(overLimits(stork, heavy)).toHaveLength(2);
    expect(limited).toEqual([]);
  });
});

describe('what an operator should know', () => {
  const plain = warnings([]);

  it.each<[string, Edits, RegExp]>([
    [
      'a servo on the light of the board',
      [['servo: { channel: 5', 'servo: { channel: 13']],
      /the servo of shoulder hangs on pin 13, which the board blinks as it starts/,
    ],
    [
      'power on the light of the board',
      [['stop_category: 2', 'power: { channel: 13 }']],
      /its power hangs on pin 13.*relay closes by itself/,
    ],
    [
      'power that is on when low',
      [['stop_category: 2', 'power: { channel: 9, on: low }']],
      /its power is on when low, and the board drives its pins low as it starts/,
    ],
    [
      'more commands than an AVR board pulses',
      [['rate_hz: 50', 'rate_hz: 100']],
      /of 100 commands a second its servos see 50/,
    ],
    [
      'more commands than analog servos take',
      [
        ['rate_hz: 50', 'rate_hz: 100'],
        ['wire: firmata', 'wire: frames'],
      ],
      /100 commands a second are seen only by servos that are pulsed as often/,
    ],
    ['a port that is all but full', [['baud=57600', 'baud=3200']], /its commands take 94 % of 3200 baud/],
    [
      'a supply that cannot feed a jam',
      [['amps: 5', 'amps: 2.5']],
      /all its servos at once, starting or blocked, would draw 3\.0 A, and its supply gives 2\.5 A/,
    ],
    [
      'a supply for motors of which nothing is known',
      [
        [', stall_a: 2', ''],
        [', stall_a: 1', ''],
      ],
      /its current cannot be told/,
    ],
    [
      'servos that may fall',
      [['on_lost_pulse: limp', 'on_lost_pulse: unknown']],
      /on_lost_pulse is unknown, and shoulder and elbow would fall/,
    ],
    [
      'a load that is held back',
      [
        ['rate_hz: 50', 'load: limit'],
        ['stall_nm: 4,', 'stall_nm: 3,'],
      ],
      /^stork: load: limit holds shoulder back in a part of the range$/,
    ],
    [
      'an acceleration that is held back',
      [
        ['rate_hz: 50', 'moving_load: limit'],
        ['stall_nm: 4,', 'stall_nm: 4, use: 0.1,'],
      ],
      /^stork: moving_load: limit holds shoulder back in a part of the range$/,
    ],
    [
      'a large arm that moves unasked',
      [['stop_category: 2', 'wake: last']],
      /it goes to its last pose without asking, and reaches 500 mm/,
    ],
  ])('%s', (_what, edits, sentence) => {
    expect(warnings(edits)).toContainEqual(expect.stringMatching(sentence));
    expect(plain).not.toContainEqual(expect.stringMatching(sentence));
  });

  it('a board with more servos than an Uno drives well', () => {
    const joints = Array.from(
      { length: 12 },
      (_, i) =>
        `  - { name: j${i}, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: ${i + 14}, points: [[-90, 560], [90, 2440]] } }`,
    ).join('\n');
    const many = (count: number) =>
      `follower: fan\nport: serial:/dev/fan\nwire: firmata\njoints:\n${joints.split('\n').slice(0, count).join('\n')}\n`;
    const boards = (count: number) =>
      boardWarnings(
        rigIn({ 'rig.yaml': edited(CRANE_RIG, ['- stork.yaml', '- fan.yaml']), 'fan.yaml': many(count) }).rig.boards,
      );
    expect(boards(11)).toEqual([]);
    expect(boards(12)).toEqual([
      expect.stringMatching(/^fan: 12 servos on one board, serial:\/dev\/fan: an Uno drives 11/),
    ]);
  });
});

describe('the report as text', () => {
  const lines = reportLines(craneReport());

  it('stands on a page', () => {
    expect(
      Math.max(...lines.filter((line) => !line.startsWith('note')).map((line) => line.length)),
    ).toBeLessThanOrEqual(132);
    expect(lines.join('\n')).not.toMatch(/NaN|undefined|null|Infinity|-0(?!\d|\.\d*[1-9])\b/);
  });

  it('lines up its columns under their heads', () => {
    const head = lines.findIndex((line) => line.includes('empty Nm'));
    const [titles = '', shoulder = '', elbow = ''] = lines.slice(head, head + 3);
    const end = titles.indexOf('full Nm') + 'full Nm'.length;
    // 9.80665 * (0.075 sin 85 + 0.02), and 9.80665 * 0.02.
    expect([shoulder, elbow].map((line) => line.slice(0, end).trim().split(/\s+/).at(-1))).toEqual(['0.929', '0.196']);
  });

  it('says what is not known with a dash', () => {
    const still = reportLines(craneReport([['    from: shoulder\n', '']]));
    expect(still.some((line) => /^ +shoulder +– +–/.test(line))).toBe(true);
  });

  it('ends with what is over, so that it is read', () => {
    const heavy = reportLines(craneReport([['stall_nm: 4,', 'stall_nm: 3,']]));
    expect(heavy.at(-1)).toMatch(/^OVER {2}stork: shoulder has to hold/);
  });
});
