import { z } from 'zod';
import { follower } from './follower.ts';
import { leader } from './leader.ts';
import { nameOf, textOf } from './quantities.ts';

const like = textOf(
  'the path of the profile to build on; keys beside it are laid over that profile as a JSON merge patch (RFC 7396)',
);

/** Profiles that build on another one: any of the keys, and `like`. */
export const leaderOver = leader.partial().extend({ like });
export const followerOver = follower.partial().extend({ like });

const LEADER = 'the leader: the path of its profile, relative to this file, or the profile itself';
const FOLLOWERS = 'the followers: paths of profiles, relative to this file, or the profiles themselves';
const FOLLOWERS_MAX = 256;

/** The whole file. */
export const rig = z
  .strictObject({
    rig: nameOf('the name of the rig'),
    leader: z.union([textOf('the path of a leader file'), leader, leaderOver]).describe(LEADER),
    unison: z.boolean().default(false).describe('true: all followers keep step with the one that has to move slowest'),
    pace: z.number().min(1).max(100).default(100).describe('the percentage of every speed limit at the start'),
    followers: z
      .array(z.union([textOf('the path of a follower file'), follower, followerOver]))
      .min(1)
      .max(FOLLOWERS_MAX)
      .describe(FOLLOWERS),
  })
  .describe('one rig: a leader and its followers');

/** The rig's own keys, because its profiles may stand in other files and are read apart. */
export const rigFrame = rig.extend({
  leader: z.unknown().describe(LEADER),
  followers: z.array(z.unknown()).min(1).max(FOLLOWERS_MAX).describe(FOLLOWERS),
});

export type RigFrame = z.infer<typeof rigFrame>;
