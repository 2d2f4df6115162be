import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import { fitFromCaptures, fitMeasured } from '../../src/cli/fit.ts';
import { filesOnDisk } from '../../src/cli/fit-files.ts';
import type { FitReport } from '../../src/fit/report.ts';
import { fitDesk, HEADER, LEADER, PLAIN, points, RIG, WREN } from './fit-desk.ts';

const desk = fitDesk();
const { fit, read, there } = desk;
beforeEach(() => desk.lay());
afterAll(() => desk.remove());

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
    desk.write('bench.yaml', alone);
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
    desk.write('bench.yaml', RIG.replace(/followers: .*/, 'followers: [wren.yaml]'));
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
    const { status } = fit(HEADER + points('base'), { dryRun: true, report: desk.path('report.html') });
    expect(status).toBe(0);
    const html = read('report.html');
    expect(html).toMatch(/^<!doctype html>\n<html lang="en">/);
    expect(html.match(/<svg /g)).toHaveLength(2);
    expect(html).not.toMatch(/<(script|link|img)|url\(|@import|src=/);
  });
});

it('A file that cannot be written takes the others back', () => {
  desk.write('wren.yaml', WREN);
  desk.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
  const at = desk.write(
    'captures.csv',
    `${HEADER}${points('base')}match,wren,base,100,700,\nmatch,wren,base,500,1500,\nmatch,wren,base,900,2300,\n`,
  );
  const disk = filesOnDisk(() => ({ date: '2026-12-01', time: '20-15-00' }));
  const err: string[] = [];
  const status = fitFromCaptures(
    desk.rig,
    { ...PLAIN, from: at, check: undefined, wish: { jitterM: 1, lagS: 1 } },
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
    const good = fit(HEADER + points('base'), { from: undefined, check: desk.path('captures.csv') });
    expect(good).toMatchObject({ status: 0, out: expect.stringContaining('stick base: has not drifted') as string });
    const slipped = (HEADER + points('base')).replace(/,,(-?\d+)\n/g, (_, deg: string) => `,,${Number(deg) + 4}\n`);
    const bad = fit(slipped, { from: undefined, check: desk.path('captures.csv') });
    expect(bad).toMatchObject({
      status: 1,
      out: expect.stringMatching(/has drifted; 9 points lie (3\.[89]|4\.[01])\d? deg/) as string,
    });
    expect(read('leader.yaml')).toBe(LEADER);
  });
});

/** Of a session that asks for nothing beyond. */
const FLAGS = { ...PLAIN, wish: { jitterM: 1, lagS: 1 }, captures: undefined };

it('A session adds nothing to captures of other columns, and says what to do instead', async () => {
  const at = desk.write('bench.captures.csv', HEADER + points('base'));
  const err: string[] = [];
  const nobody = (): never => {
    throw new Error('a session was begun');
  };
  const printer = { out: () => {}, err: (text: string) => void err.push(text) };
  expect(await fitMeasured(desk.rig, FLAGS, nobody, filesOnDisk(), printer)).toBe(2);
  expect(err.join('')).toBe(
    `error: ${at}: its columns are not those of a session; name another file with --captures, or fit this one with --from\n`,
  );
  expect(read('bench.captures.csv')).toBe(HEADER + points('base'));
});

it('eidograph fit without a terminal says what to do instead', async () => {
  const err: string[] = [];
  const printer = { out: () => {}, err: (text: string) => void err.push(text) };
  expect(await fitMeasured(desk.rig, FLAGS, null, filesOnDisk(), printer)).toBe(2);
  expect(err.join('')).toContain('say --from captures.csv');
  expect(there()).toEqual(['bench.yaml', 'leader.yaml', 'wren.yaml']);
});
