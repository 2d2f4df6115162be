import type { LeaderJoint, LeaderProfile } from '../rig/schema/leader.ts';
import type { Capture, JointCaptures } from './captures.ts';
import { leaderCurve } from './curves.ts';
import { PROTRACTOR_DEG } from './map-error.ts';
import { fitMap } from './map-fit.ts';
import { assumedNoise, noiseOf, QUANTISATION_COUNTS } from './noise.ts';
import { pointsReport } from './points-report.ts';
import { type FitProblem, noMapProblem, problem } from './problems.ts';
import type { JointReport, PointsReport, StillReport, SweepReport } from './report.ts';
import { judgeHold } from './stillness.ts';
import { analyseSweep } from './sweep.ts';
import { holdWords, pointsWords, sweepWords } from './words.ts';

/** Counts to degrees, fitted or as the profile has it. */
export type LeaderMap = (counts: number) => number;

export interface LeaderPart {
  readonly report: JointReport;
  readonly problems: readonly FitProblem[];
  readonly map: LeaderMap;
}

/** From so many points on a wrong one is named; fewer are told to be few. */
export const POINTS_ENOUGH = 6;
/** A joint at rest that spreads over more of the converter's range has a loose wire. */
const NOISE_SHARE_MAX = 0.02;
/** So many readings of one angle in a row are one hold, not that many points. */
const HOLD_READINGS_MIN = 12;

export function fitLeaderJoint(profile: LeaderProfile, index: number, captures: JointCaptures): LeaderPart {
  const joint = profile.joints[index] as LeaderJoint;
  const problems: FitProblem[] = [];
  const complain = (found: FitProblem): null => {
    problems.push(found);
    return null;
  };
  const [countsLow, countsHigh] = profile.counts;
  const width = countsHigh - countsLow;
  const arm = profile.leader;

  const still = captures.of['leader-still'].map(({ counts }) => counts);
  const rest = still.length >= 2 ? noiseOf(still) : null;
  const unsteady = rest !== null && rest.counts > NOISE_SHARE_MAX * width;
  if (unsteady)
    complain(
      problem('FIT_NEVER_STILL', arm, joint.name, `at rest it reads ${rest.counts.toFixed(0)} counts up and down`),
    );

  const swept = captures.of['leader-sweep'].map(({ counts }) => counts);
  const sweep = swept.length >= 2 ? analyseSweep(swept, profile.counts, rest?.counts ?? null) : null;
  if (sweep?.wraps === true)
    complain(problem('FIT_WRAPS', arm, joint.name, 'the pot runs over the end of its track inside the travel'));

  const { points, rejected } = holds(
    captures.of['leader-point'],
    rest?.counts ?? sweep?.noiseCounts ?? assumedNoise(width),
  );
  for (const [deg, why] of rejected)
    complain(problem('FIT_NEVER_STILL', arm, joint.name, `the hold at ${deg} deg: ${why}`));
  const x = points.map(({ counts }) => counts);
  const y = points.map(({ knownDeg }) => knownDeg);
  const wanted = captures.of['leader-point'].length > 0 && sweep?.wraps !== true;
  const slope = Math.abs((Math.max(...y) - Math.min(...y)) / (Math.max(...x) - Math.min(...x)));
  const fit = wanted
    ? fitMap(x, y, {
        noise: Number.isFinite(slope) ? slope * QUANTISATION_COUNTS : 0,
        usualScatter: PROTRACTOR_DEG,
        curves: true,
      })
    : null;
  const found = fit !== null && 'why' in fit ? complain(noMapProblem(fit, arm, joint.name, 'counts')) : fit;
  const fitted: PointsReport | null = found === null ? null : pointsReport(found, x, y, width);

  const former = leaderCurve(joint);
  const map = found?.value ?? former;
  const degPerCount = Math.abs(map(countsHigh) - map(countsLow)) / width;
  const sweepReport: SweepReport | null =
    sweep === null
      ? null
      : {
          readings: sweep.readings,
          span_counts: sweep.span,
          span_deg: [map(sweep.span[0]), map(sweep.span[1])],
          ends_confirmed: sweep.endsConfirmed,
          noise_counts: sweep.noiseCounts,
          noise_deg: sweep.noiseCounts * degPerCount,
          effective_bits: sweep.effectiveBits,
          spikes: sweep.spikes,
          dead_spots_counts: sweep.deadSpots,
          gaps_counts: sweep.gaps,
          visited_percent: 100 * sweep.visited,
          wraps: sweep.wraps,
          hysteresis_counts: sweep.hysteresis?.counts ?? null,
          hysteresis_deg: sweep.hysteresis === null ? null : sweep.hysteresis.counts * degPerCount,
          hand_wobble_counts: sweep.hysteresis?.wobbleCounts ?? null,
          hysteresis_seen: sweep.hysteresis?.seen ?? false,
        };
  const stillReport: StillReport | null =
    rest === null ? null : { readings: rest.readings, noise_counts: rest.counts, noise_deg: rest.counts * degPerCount };
  return {
    report: {
      leader: arm,
      joint: joint.name,
      channel: channelOf(captures) ?? joint.channel,
      still: stillReport,
      sweep: sweepReport,
      points: fitted,
      notes: [
        ...(fitted === null ? [] : pointsWords(fitted, 'counts', POINTS_ENOUGH)),
        ...(sweepReport === null ? [] : sweepWords(sweepReport)),
      ],
    },
    problems,
    map,
  };
}

interface Points {
  readonly points: readonly { readonly counts: number; readonly knownDeg: number }[];
  readonly rejected: readonly (readonly [deg: number, why: string])[];
}

/** Rows are points, unless many in a row give one angle: those are the readings of one hold, and have to be still. */
function holds(rows: readonly Capture[], noise: number): Points {
  const points: { counts: number; knownDeg: number }[] = [];
  const rejected: [number, string][] = [];
  for (let from = 0; from < rows.length; ) {
    const { knownDeg } = rows[from] as Capture;
    let to = from;
    while (to < rows.length && rows[to]?.knownDeg === knownDeg && Number.isNaN(rows[to]?.noiseCounts)) to++;
    if (to - from < HOLD_READINGS_MIN) {
      to = Math.max(to, from + 1);
      for (const { counts } of rows.slice(from, to)) points.push({ counts, knownDeg });
    } else {
      const hold = judgeHold(
        rows.slice(from, to).map(({ counts }) => counts),
        noise,
      );
      if (hold.still) points.push({ counts: hold.mean, knownDeg });
      else rejected.push([knownDeg, holdWords(hold)]);
    }
    from = to;
  }
  return { points, rejected };
}

/** The channel that the wiring step has found the joint on. */
function channelOf({ of }: JointCaptures): number | null {
  const told = Object.values(of)
    .flatMap((rows) => rows.slice(0, 1))
    .find(({ channel }) => !Number.isNaN(channel));
  return told?.channel ?? null;
}
