import { leversM } from '../arm/extent.ts';
import { compileArm } from '../rig/compile-arm.ts';
import type { RigProfiles } from '../rig/compile.ts';
import type { FollowerProfile } from '../rig/schema/follower.ts';
import type { JointReport, MatchReport, SuggestionReport } from './report.ts';
import { type Feed, suggest, type SuggestWish } from './suggest.ts';

const RAD = Math.PI / 180;
const MM = 1000;

interface NamedFeed extends Feed {
  readonly follower: string;
  readonly joint: string;
}

/**
 * Smoothing and deadbands from the noise that was measured, for joints whose followers have an `arm:`.
 * @param rateHz readings a second
 */
export function suggestions(
  { followers }: RigProfiles,
  joints: readonly JointReport[],
  matches: readonly MatchReport[],
  wish: SuggestWish,
  rateHz: number,
): readonly SuggestionReport[] {
  const all = followers.flatMap((profile) => feedsOf(profile, matches));
  return joints.flatMap(({ joint, still, sweep }): SuggestionReport[] => {
    const noiseDeg = still?.noise_deg ?? sweep?.noise_deg;
    const feeds = all.filter((feed) => feed.from === joint);
    if (noiseDeg === undefined || feeds.length === 0) return [];
    const found = suggest({ noiseRad: noiseDeg * RAD, feeds }, wish, rateHz);
    return [
      {
        joint,
        cutoff_hz: found.cutoffHz,
        lag_ms: found.lagS * 1000,
        feeds: feeds.map(({ follower, joint: name }, i) => ({
          follower,
          joint: name,
          tip_mm: (found.tipM[i] as number) * MM,
          deadband_deg: (found.deadbandRad[i] as number) / RAD,
        })),
      },
    ];
  });
}

function feedsOf(
  profile: FollowerProfile,
  matches: readonly MatchReport[],
): readonly (NamedFeed & { readonly from: string })[] {
  const { arm, joints, follower } = profile;
  if (arm === undefined) return [];
  const spec = compileArm(arm, joints);
  const levers = leversM(spec);
  const n = spec.links.length;
  const leverOf = new Map(spec.links.map((link, i) => [link.joint, levers[i * (n + 1) + n] as number]));
  const feeds = joints.flatMap((joint, j) => {
    const leverM = leverOf.get(j) ?? 0;
    const weights = typeof joint.from === 'string' ? { [joint.from]: 1 } : (joint.from ?? {});
    // What stretch makes of the gain is at most its range over the leader's travel; without that it is left out.
    if (leverM === 0 || joint.stretch) return [];
    const match = matches.find((each) => each.follower === follower && each.joint === joint.name);
    const gain = match?.gain.is ?? joint.gain;
    return Object.entries(weights).map(([from, weight]) => ({
      from,
      follower,
      joint: joint.name,
      gain: gain * weight,
      leverM,
    }));
  });
  return feeds.map((feed) => ({ ...feed, sharedBy: feeds.length }));
}
