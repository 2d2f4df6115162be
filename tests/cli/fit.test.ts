import { readdirSync, readFileSync, rmSync } from 'node:fs';
import { dirname } from 'node:path';
import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import { fitFromCaptures, fitMeasured, type FitOptions } from '../../src/cli/fit.ts';
import { filesOnDisk } from '../../src/cli/fit-files.ts';
import { FIT_CODES } from '../../src/fit/problems.ts';
import type { FitReport } from '../../src/fit/report.ts';
import { random } from '../../src/sim/random.ts';
import { scratch } from './rigs.ts';

const files = scratch();
afterAll(() => files.remove());

const RIG =
  'rig: bench\nleader: leader.yaml # the stick\nfollowers: [wren.yaml, { like: wren.yaml, follower: robin, port: "sim:arm?name=robin" }]\n';
const LEADER = `# pots
leader: stick
port: sim:hand
wire: lines
counts: [0, 1023]
joints:
  - name: base            # a comment that stays
    channel: 0
    points: [[100, -100], [900, 100]]    # first guess
  - { name: elbow, channel: 1, points: [[100, -100], [900, 100]], travel_counts: [90, 910] }
`;
const WREN = `follower: wren
port: sim:arm?name=wren
wire: { lines: { template: "{base.us},{elbow.us}\\n" } }
wake: ask
joints:
  - { name: base, from: base, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 0, points: [[-90, 600], [90, 2400]] } }
  - { name: elbow, from: { base: 1, elbow: 1 }, range_deg: [-60, 60], speed_deg_s: 60, accel_deg_s2: 240, servo: { channel: 1, points: [[-90, 600], [90, 2400]] } }
`;

let rig = '';
beforeEach(() => {
  for (const name of readdirSync(files.path('.'))) rmSync(files.path(name), { recursive: true });
  rig = files.write('bench.yaml', RIG);
  files.write('leader.yaml', LEADER);
  files.write('wren.yaml', WREN);
});
const read = (name: string): string => readFileSync(files.path(name), 'utf8');
const there = (): string[] => readdirSync(dirname(rig)).sort();

const HEADER = 'step,arm,joint,counts,pulse_us,known_deg\n';
/** Points of a straight pot, 4 counts a degree, read a little wrong. */
const points = (joint: string, wrongAt?: number): string => {
  const chance = random(5, joint.length);
  return [-100, -75, -50, -25, 0, 25, 50, 75, 100]
    .map((deg) => {
      const counts = 500 + 4 * deg + chance.between(-1, 1) + (deg === wrongAt ? 60 : 0);
      return `leader-point,stick,${joint},${counts.toFixed(1)},,${deg}\n`;
    })
    .join('');
};

function fit(captures: string, options: Partial<FitOptions> = {}) {
  const out: string[] = [];
  const err: string[] = [];
  const at = files.write('captures.csv', captures);
  const status = fitFromCaptures(
    rig,
    {
      from: at,
      check: undefined,
      json: false,
      dryRun: false,
      partly: false,
      report: undefined,
      smooth: false,
      wish: { jitterM: 0.0005, lagS: 0.06 },
      ...options,
    },
    filesOnDisk(() => ({ date: '2026-12-01', time: '20-15-00' })),
    { out: (text) => out.push(text), err: (text) => err.push(text) },
  );
  return { status, out: out.join(''), err: err.join('') };
}

describe('eidograph fit --from', () => {
  it('writes fitted values only, keeps comments and order, and the old file with its stamp', () => {
    const { status, err } = fit(HEADER + points('base'));
    expect(err).toContain('leader.yaml has the fitted values; the old file is');
    expect(status).toBe(0);
    expect(read('leader.yaml.2026-12-01T20-15-00')).toBe(LEADER);
    const lines = read('leader.yaml').split('\n');
    const was = LEADER.split('\n');
    // One line changes, one comes; every other one is the same.
    expect(lines.filter((line) => !was.includes(line))).toEqual([
      expect.stringMatching(
        /^ {4}points: \[\[100[.\d]*, -(99|100)[.\d]*\], \[900[.\d]*, (99|100)[.\d]*\]\] {4}# first guess$/,
      ),
      expect.stringMatching(
        /^ {4}fitted: \{ date: "2026-12-01", method: straight, residual_deg: 0\.\d+, error_deg: 0\.\d+, points: 9 \}$/,
      ),
    ]);
    expect(was.filter((line) => !lines.includes(line))).toEqual([
      '    points: [[100, -100], [900, 100]]    # first guess',
    ]);
    expect(read('wren.yaml')).toBe(WREN);
  });

  it('shows what would change, and writes nothing, on a dry run', () => {
    const before = there();
    const { status, out, err } = fit(HEADER + points('base'), { dryRun: true });
    expect(status).toBe(0);
    expect(out).toContain('-     points: [[100, -100], [900, 100]]    # first guess\n');
    expect(out).toMatch(/\+ {5}points: \[\[.*# first guess\n/);
    expect(err).toContain('nothing was written');
    expect([there(), read('leader.yaml')]).toEqual([[...before, 'captures.csv'].sort(), LEADER]);
  });

  it('prints every figure as one JSON object', () => {
    const { out } = fit(HEADER + points('base', 50), { json: true, dryRun: true });
    const report = JSON.parse(out) as FitReport;
    expect(report.joints[0]?.points).toMatchObject({ curve: 'straight', used: 8, wrong: { index: 6 } });
    // 60 counts are 15 degrees.
    expect(report.joints[0]?.points?.wrong?.away_deg).toBeCloseTo(-15, 0);
  });

  it('names the wrong point, in words', () => {
    expect(fit(HEADER + points('base', 50), { dryRun: true }).out).toMatch(
      /the point at \d+\.\d counts \(50 deg\) is -1[45]\.\d deg off/,
    );
  });

  it('averages many readings of one angle in a row, and refuses a hold that moved', () => {
    const hold = (deg: number, drift: number): string =>
      Array.from(
        { length: 40 },
        (_, i) => `leader-point,stick,base,${500 + 4 * deg + Math.round((drift * i) / 40) + (i % 2)},,${deg}\n`,
      ).join('');
    const still = JSON.parse(
      fit(HEADER + hold(-80, 0) + hold(0, 0) + hold(80, 0), { json: true, dryRun: true }).out,
    ) as FitReport;
    expect(still.joints[0]?.points?.measured.map(({ x }) => x)).toEqual([180.5, 500.5, 820.5]);
    const moved = fit(HEADER + hold(-80, 0) + hold(0, 30) + hold(80, 0));
    expect(moved.err).toContain('the hold at 0 deg: it was still moving');
    expect(moved.status).toBe(2);
    expect(read('leader.yaml')).toBe(LEADER);
  });

  it('takes the last attempt at a step', () => {
    const header = 'step,arm,joint,counts,pulse_us,known_deg,attempt\n';
    const row = (counts: number, deg: number, attempt: number): string =>
      `leader-point,stick,base,${counts},,${deg},${attempt}\n`;
    const report = JSON.parse(
      fit(header + row(0, 0, 1) + row(900, 10, 1) + row(100, -100, 2) + row(900, 100, 2), { json: true, dryRun: true })
        .out,
    ) as FitReport;
    expect(report.joints[0]?.points?.map).toEqual([
      [100, -100],
      [900, 100],
    ]);
  });

  it('writes a deadband that was measured in fine steps, and nothing else of that servo', () => {
    const alone = RIG.replace(/followers: .*/, 'followers: [wren.yaml]');
    files.write('bench.yaml', alone);
    const steps = [
      [1500, 1],
      [1503, 1],
      [1507, 0],
      [1508, 1],
      [1512, 0],
      [1513, 1],
    ].map(([us, moved]) => `servo-step,wren,base,,${us},,${moved}\n`);
    const { status, out } = fit(`step,arm,joint,counts,pulse_us,known_deg,moved\n${steps.join('')}`);
    expect(status).toBe(0);
    expect(out).toMatch(/deadband +4\.5 ± 0\.5 us/);
    expect(read('wren.yaml')).toBe(
      WREN.replace(
        'servo: { channel: 0, points: [[-90, 600], [90, 2400]] }',
        'servo: { channel: 0, points: [[-90, 600], [90, 2400]], deadband_us: 4.5 }',
      ),
    );
  });

  it('tells backlash from deadband where the travel was measured both ways too', () => {
    files.write('bench.yaml', RIG.replace(/followers: .*/, 'followers: [wren.yaml]'));
    // A degree is lost at each pulse: 1 us a tenth of a degree, 4.5 us of deadband; 0.55 degrees are play.
    const ways = [700, 1100, 1500, 1900, 2300, 1900, 1500, 1100, 700].map(
      (us, i) => `servo-point,wren,base,,${us},${((us - 1500) / 10 + (i < 5 ? -0.5 : 0.5)).toFixed(1)},\n`,
    );
    const steps = '1500,,1 1503,,1 1507,,0 1508,,1'.split(' ').map((cells) => `servo-step,wren,base,,${cells}\n`);
    const header = 'step,arm,joint,counts,pulse_us,known_deg,moved\n';
    const servo = (text: string) =>
      (JSON.parse(fit(header + text, { json: true, dryRun: true }).out) as FitReport).servos[0];
    expect(servo(ways.join(''))).toMatchObject({
      deadband_us: null,
      backlash_deg: null,
      notes: [expect.stringContaining('1.00 deg are lost as it turns back, backlash and deadband together') as string],
    });
    const both = servo(ways.join('') + steps.join(''));
    expect(both?.travel?.lost_motion_deg?.is).toBeCloseTo(1, 6);
    expect(both?.backlash_deg?.is).toBeCloseTo(0.55, 2);
    expect(both?.notes).toEqual([]);
  });

  it('writes a report that needs no other file', () => {
    const { status } = fit(HEADER + points('base'), { dryRun: true, report: files.path('report.html') });
    expect(status).toBe(0);
    const html = read('report.html');
    expect(html).toMatch(/^<!doctype html>\n<html lang="en">/);
    expect(html.match(/<svg /g)).toHaveLength(2);
    expect(html).not.toMatch(/<(script|link|img)|url\(|@import|src=/);
  });
});

/** A pot that trembles by 4 counts, one degree, and followers whose tips are 200 mm from their base joint. */
describe('Suggested smoothing', () => {
  const ARM =
    'arm: { links: [{ joint: base, axis: z, to_mm: [100, 0, 0] }, { joint: elbow, axis: z, to_mm: [100, 0, 0] }] }\n';
  const TREMBLES = Array.from(
    { length: 200 },
    (_, i) => `leader-still,stick,base,${500 + [4, -4, 4, -4, 0][i % 5]!},,\n`,
  ).join('');

  beforeEach(() => {
    files.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
    files.write('wren.yaml', WREN.replace('joints:\n', `${ARM}joints:   # two\n`));
    files.write(
      'leader.yaml',
      LEADER.replace(
        '# first guess',
        '# first guess\n    smooth: { cutoff_hz: 9, beta_hz_per_deg_s: 0.1 }   # by feel',
      ),
    );
  });

  it('is only said unless it is asked for', () => {
    const { out } = fit(HEADER + TREMBLES + points('base'));
    expect(out).toMatch(/base +smooth: \{ cutoff_hz: [\d.]+ \}, \d+ ms of lag; wren base: tip [\d.]+ mm rms/);
    expect(read('leader.yaml')).toContain('smooth: { cutoff_hz: 9, beta_hz_per_deg_s: 0.1 }   # by feel\n');
    expect(read('wren.yaml')).not.toContain('deadband_deg');
  });

  it('is shown on a dry run, and written on request: the one value of it, and comments kept', () => {
    const captures = HEADER + TREMBLES + points('base');
    const shown = fit(captures, { smooth: true, dryRun: true });
    expect(shown.out).toMatch(/\+ {5}smooth: \{ cutoff_hz: [\d.]+, beta_hz_per_deg_s: 0\.1 \} {3}# by feel/);
    expect(read('leader.yaml')).toContain('cutoff_hz: 9,');
    const wish = { jitterM: 0.0005, lagS: 1 };
    const report = JSON.parse(fit(captures, { smooth: true, json: true, wish }).out) as FitReport;
    const [base] = report.suggestions;
    expect(read('leader.yaml')).toContain(
      `smooth: { cutoff_hz: ${Number((base?.cutoff_hz ?? 0).toFixed(2))}, beta_hz_per_deg_s: 0.1 }   # by feel\n`,
    );
    expect(base?.feeds.every(({ deadband_deg }) => deadband_deg === 0)).toBe(true);
    expect(read('wren.yaml')).toContain('joints:   # two\n');
    expect(read('wren.yaml')).not.toContain('deadband_deg');
  });

  it('leaves to deadbands what may not lag more: no narrower than was suggested', () => {
    const wish = { jitterM: 0.00002, lagS: 0.01 };
    const report = JSON.parse(
      fit(HEADER + TREMBLES + points('base'), { smooth: true, json: true, wish }).out,
    ) as FitReport;
    const feeds = report.suggestions[0]?.feeds ?? [];
    expect(feeds.map(({ joint }) => joint)).toEqual(['base', 'elbow']);
    for (const { joint, deadband_deg } of feeds) {
      const written = new RegExp(`name: ${joint}.*deadband_deg: ([\\d.]+)`).exec(read('wren.yaml'))?.[1];
      expect(Number(written)).toBeGreaterThanOrEqual(deadband_deg);
      expect(Number(written)).toBeLessThan(deadband_deg + 0.01);
    }
    expect(report.suggestions[0]?.lag_ms).toBeCloseTo(10, 6);
  });
});

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
    files.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
    const text = profile(WREN);
    files.write('wren.yaml', text);
    const { status, err } = fit(HEADER + captures);
    expect(err).toMatch(words);
    expect(err).toContain(`${FIT_CODES[code]} (${code})`);
    expect(status).toBe(2);
    expect(read('wren.yaml')).toBe(text);
  });

  it('that are none are no fit', () => {
    for (const from of [{}, { from: undefined, check: files.path('captures.csv') }]) {
      const { status, err } = fit(HEADER, from);
      expect(err).toMatch(/captures\.csv: there are no captures in it; measure some first/);
      expect(status).toBe(2);
    }
    rmSync(files.path('captures.csv'));
    const missing = fit(HEADER, { from: files.path('nowhere.csv') });
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
    rig = files.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
    const { status, err } = fit(
      `${HEADER}servo-point,wren,base,,700,-25\nservo-point,wren,base,,1500,0\nservo-point,wren,base,,2300,25\n`,
    );
    expect(err).toMatch(/wren\.yaml:\d+:\d+: joints\[0\]/);
    expect(status).toBe(1);
    expect(read('wren.yaml')).toBe(WREN);
  });
});

it('A file that cannot be written takes the others back', () => {
  files.write('wren.yaml', WREN);
  rig = files.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
  const at = files.write(
    'captures.csv',
    `${HEADER}${points('base')}match,wren,base,100,700,\nmatch,wren,base,500,1500,\nmatch,wren,base,900,2300,\n`,
  );
  const disk = filesOnDisk(() => ({ date: '2026-12-01', time: '20-15-00' }));
  const err: string[] = [];
  const status = fitFromCaptures(
    rig,
    {
      from: at,
      check: undefined,
      json: false,
      dryRun: false,
      partly: false,
      report: undefined,
      smooth: false,
      wish: { jitterM: 1, lagS: 1 },
    },
    {
      ...disk,
      replace: (change) =>
        change.file.endsWith('wren.yaml') ? { wrong: 'the disk is full', right: 'make room' } : disk.replace(change),
    },
    { out: () => {}, err: (text) => void err.push(text) },
  );
  expect(status).toBe(1);
  expect(err.join('')).toContain('error: the disk is full; make room');
  expect([read('leader.yaml'), read('wren.yaml')]).toEqual([LEADER, WREN]);
});

describe('eidograph fit --check', () => {
  it('says of each joint whether it has drifted, and ends with 1 if one has', () => {
    const good = fit(HEADER + points('base'), { from: undefined, check: files.path('captures.csv') });
    expect(good).toMatchObject({ status: 0, out: expect.stringContaining('stick base: has not drifted') as string });
    const slipped = (HEADER + points('base')).replace(/,,(-?\d+)\n/g, (_, deg: string) => `,,${Number(deg) + 4}\n`);
    const bad = fit(slipped, { from: undefined, check: files.path('captures.csv') });
    expect(bad).toMatchObject({
      status: 1,
      out: expect.stringMatching(/has drifted; 9 points lie (3\.[89]|4\.[01])\d? deg/) as string,
    });
    expect(read('leader.yaml')).toBe(LEADER);
  });
});

it('eidograph fit without a terminal says what to do instead', async () => {
  const err: string[] = [];
  const printer = { out: () => {}, err: (text: string) => void err.push(text) };
  const flags = {
    json: false,
    dryRun: false,
    partly: false,
    report: undefined,
    smooth: false,
    wish: { jitterM: 1, lagS: 1 },
    captures: undefined,
  };
  expect(await fitMeasured(rig, flags, null, filesOnDisk(), printer)).toBe(2);
  expect(err.join('')).toContain('say --from captures.csv');
  expect(there()).toEqual(['bench.yaml', 'leader.yaml', 'wren.yaml']);
});
