import { INK } from '../draw/ink.ts';
import { type Pair, type Plot, type Series, xyPlot } from '../draw/xy-plot.ts';
import type { Capture } from './captures.ts';
import { curveThrough } from './curves.ts';
import type { JointReport, MatchReport, PointsReport, ServoReport } from './report.ts';

/** The plots of one joint, each an SVG element; only what was measured has one. */

const LOOKS = 120;

export function leaderPlots(joint: JointReport, captures: readonly Capture[]): readonly string[] {
  const own = captures.filter((capture) => capture.arm === joint.leader && capture.joint === joint.joint);
  const of = (step: Capture['step']): readonly number[] =>
    own.filter((c) => c.step === step).map(({ counts }) => counts);
  return [
    ...(joint.points === null ? [] : mapPlots(joint.points, 'counts')),
    ...(joint.sweep === null ? [] : [sweepPlot(of('leader-sweep'), joint)]),
    ...(joint.still === null ? [] : [noisePlot(of('leader-still'))]),
  ];
}

export function servoPlots(servo: ServoReport): readonly string[] {
  return servo.travel === null ? [] : mapPlots(servo.travel.points, 'us');
}

export function matchPlots({ points, follower }: MatchReport): readonly string[] {
  return mapPlots(points, `deg of ${follower}`);
}

function mapPlots(points: PointsReport, unit: string): readonly string[] {
  const { measured, map, curve, wrong, error_95_deg } = points;
  const good = measured.filter((_, i) => i !== wrong?.index);
  const bad = measured.filter((_, i) => i === wrong?.index);
  const value = curveThrough(map, curve);
  const [from, to] = [Math.min(...measured.map(({ x }) => x)), Math.max(...measured.map(({ x }) => x))];
  const along = Array.from({ length: LOOKS + 1 }, (_, i) => from + ((to - from) * i) / LOOKS);
  const dots = (of: (point: (typeof measured)[number]) => number): Series[] => [
    { kind: 'dots', mark: 'dot', ink: INK.blue, at: good.map((p): Pair => [p.x, of(p)]) },
    ...(bad.length === 0
      ? []
      : [{ kind: 'dots', mark: 'cross', ink: INK.vermilion, at: bad.map((p): Pair => [p.x, of(p)]) } as const]),
  ];
  const level = (deg: number, dashes: string): Series => ({
    kind: 'line',
    ink: INK.black,
    dashes,
    at: [
      [from, deg],
      [to, deg],
    ],
  });
  const left = bad.length === 0 ? '' : '; cross: left out';
  const stated = error_95_deg === null ? [] : [level(error_95_deg, '2 1'), level(-error_95_deg, '2 1')];
  const shown: Plot[] = [
    {
      title: `Points (dots) and map (line)${left}`,
      x: unit,
      y: 'degrees',
      series: [
        { kind: 'line', ink: INK.green, at: along.map((x): Pair => [x, value(x)]) },
        ...dots((p) => p.known_deg),
      ],
    },
    {
      title: error_95_deg === null ? 'What is left over' : 'What is left over; dashed: error of the map',
      x: unit,
      y: 'degrees',
      series: [level(0, 'none'), ...stated, ...dots((p) => p.residual_deg)],
    },
  ];
  return shown.map(xyPlot);
}

function sweepPlot(counts: readonly number[], { sweep }: JointReport): string {
  const spots = [
    ...(sweep?.dead_spots_counts ?? []).map((spot) => ({ spot, word: 'dead' })),
    ...(sweep?.gaps_counts ?? []).map((spot) => ({ spot, word: 'gap' })),
  ];
  return xyPlot({
    title: 'Sweep',
    x: 'readings, in order',
    y: 'counts',
    series: [
      ...spots.map(({ spot: [from, to], word }): Series => ({ kind: 'shelf', from, to, word })),
      { kind: 'line', ink: INK.blue, at: counts.map((at, i): Pair => [i, at]) },
    ],
  });
}

const BINS_MAX = 24;

function noisePlot(counts: readonly number[]): string {
  const [low, high] = [Math.min(...counts), Math.max(...counts)];
  const width = Math.max(1, Math.ceil((high - low + 1) / BINS_MAX));
  const bins = new Map<number, number>();
  for (const at of counts) {
    const bin = Math.floor((at - low) / width);
    bins.set(bin, (bins.get(bin) ?? 0) + 1);
  }
  const at = [...bins].map(([bin, n]): Pair => [low + (bin + 0.5) * width - 0.5, n]);
  return xyPlot({
    title: 'Readings at rest',
    x: 'counts',
    y: 'how often',
    series: [{ kind: 'bars', ink: INK.sky, width, at }],
  });
}
