import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import type { FitReport } from '../../src/fit/report.ts';
import { fitDesk, HEADER, LEADER, points, WREN } from './fit-desk.ts';

const desk = fitDesk();
const { fit, read } = desk;
beforeEach(() => desk.lay());
afterAll(() => desk.remove());

/** A pot that trembles by 4 counts, one degree, and followers whose tips are 200 mm from their base joint. */
describe('Suggested smoothing', () => {
  const ARM =
    'arm: { links: [{ joint: base, axis: z, to_mm: [100, 0, 0] }, { joint: elbow, axis: z, to_mm: [100, 0, 0] }] }\n';
  const TREMBLES = Array.from(
    { length: 200 },
    (_, i) => `leader-still,stick,base,${500 + [4, -4, 4, -4, 0][i % 5]!},,\n`,
  ).join('');

  beforeEach(() => {
    desk.write('bench.yaml', 'rig: bench\nleader: leader.yaml\nfollowers: [wren.yaml]\n');
    desk.write('wren.yaml', WREN.replace('joints:\n', `${ARM}joints:   # two\n`));
    desk.write(
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
