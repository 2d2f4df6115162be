import { describe, expect, it } from 'vitest';
import { type Trace, trace } from '../../src/bridge/trace.ts';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { motionFaults } from '../motion-laws.ts';
import { DEG, MS, S } from '../plans.ts';
import { rigOf, rigYaml } from './performance.ts';

const rig = rigOf(
  rigYaml([
    ['wren', 'sim:arm?seed=2'],
    ['heron', 'sim:arm?seed=3'],
  ]),
);
const START_US = 5 * S;

/** Counts of a leader joint at an angle. By hand: 3300 counts are 240 degrees, 400 is -120. */
const countsOf = (deg: number): number => 400 + ((deg + 120) * 3300) / 240;

interface Line {
  readonly tUs: number;
  readonly follower: string;
  readonly state: string;
  readonly anglesRad: Float64Array;
  readonly sentUs: Float64Array;
  readonly pulsesUs: Float64Array;
}

function traced(of: CompiledRig, from: (Float64Array | null)[] = [null, null]): { run: Trace; lines: Line[] } {
  const lines: Line[] = [];
  const run = trace(of, from, START_US, ({ spec, is, arm }, tUs) =>
    lines.push({
      tUs,
      follower: spec.name,
      state: is.state,
      anglesRad: arm.governor.x.slice(),
      sentUs: arm.frame.sentUs.slice(),
      pulsesUs: arm.frame.pulsesUs.slice(),
    }),
  );
  return { run, lines };
}

function read(run: Trace, forUs: number, deg: (tS: number) => readonly [number, number], everyUs = 10 * MS): void {
  for (let us = 0; us < forUs; us += everyUs) {
    const counts = Float64Array.from(deg(us / S), countsOf);
    run.push({ kind: 'reading', tUs: START_US + us, counts });
  }
}

describe('a trace', () => {
  it('starts at rest with its ports ready, and joins with the first reading', () => {
    const { run, lines } = traced(rig);
    read(run, 10 * MS, () => [10, 10]);
    expect(lines.map((line) => [line.tUs, line.follower, line.state])).toEqual([
      [START_US, 'wren', 'joining'],
      [START_US, 'heron', 'joining'],
    ]);
  });

  it('starts elsewhere where it is told to', () => {
    const { run, lines } = traced(rig, [Float64Array.of(30 * DEG, -20 * DEG), null]);
    read(run, 10 * MS, () => [30, -20]);
    expect([...(lines[0]?.anglesRad ?? [])]).toEqual([expect.closeTo(30 * DEG, 9), expect.closeTo(-20 * DEG, 9)]);
    expect(Math.abs(lines[1]?.anglesRad[0] as number)).toBeLessThan(0.5 * DEG);
  });

  it('ends like a live run whose leader falls silent: at a stand, inside the limits', () => {
    const { run, lines } = traced(rig);
    read(run, 4 * S, (tS) => [40 * Math.sin(tS), 30 * Math.sin(2 * tS)]);
    run.end();
    for (const { name, joints } of rig.plan.followers) {
      const mine = lines.filter((line) => line.follower === name);
      expect(motionFaults(mine, joints)).toEqual([]);
      const [last, before] = [mine.at(-1) as Line, mine.at(-2) as Line];
      expect(last.tUs).toBeGreaterThan(START_US + 4 * S);
      expect(last.state).toBe('holding');
      expect([...last.anglesRad]).toEqual([...before.anglesRad]);
    }
  });

  it('says pulses as the wire rounds them', () => {
    const { run, lines } = traced(rig);
    read(run, 2 * S, (tS) => [20 * tS, -10 * tS]);
    run.end();
    for (const { sentUs, pulsesUs } of lines)
      sentUs.forEach((sent, k) => expect(Math.abs(sent - (pulsesUs[k] as number))).toBeLessThanOrEqual(0.5));
    expect(lines.some(({ sentUs, pulsesUs }) => sentUs[0] !== pulsesUs[0])).toBe(true);
  });

  it('gives the same every time, bit for bit', () => {
    const once = (): string[] => {
      const { run, lines } = traced(rig);
      read(run, 3 * S, (tS) => [50 * Math.sin(3 * tS), 30 * Math.cos(2 * tS)], 7 * MS);
      run.end();
      return lines.map((line) => `${line.tUs} ${line.follower} ${Buffer.from(line.anglesRad.buffer).toString('hex')}`);
    };
    const first = once();
    expect(first.length).toBeGreaterThan(200);
    expect(once()).toEqual(first);
  });

  it('works in unison too', () => {
    const together = rigOf(
      rigYaml(
        [
          ['wren', 'sim:arm?seed=2'],
          ['heron', 'sim:arm?seed=3'],
        ],
        'unison: true',
      ),
    );
    const { run, lines } = traced(together);
    read(run, 4 * S, () => [20, 20]);
    run.end();
    expect(lines.at(-1)?.anglesRad[0]).toBeCloseTo(20 * DEG, 6);
  });
});
