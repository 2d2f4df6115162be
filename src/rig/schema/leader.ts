import { z } from 'zod';
import { arm } from './arm.ts';
import { connection } from './connection.ts';
import { fitted } from './fitted.ts';
import { channel, counts, leaderPoints, nameOf } from './quantities.ts';

const smooth = z
  .strictObject({
    cutoff_hz: z.number().gt(0).max(1000).describe('the cutoff at standstill, in hertz, above 0: lower is smoother'),
    beta_hz_per_deg_s: z
      .number()
      .min(0)
      .max(1000)
      .default(0)
      .describe('how much the cutoff rises with speed, in hertz per degree per second: higher lags less'),
    slope_cutoff_hz: z
      .number()
      .gt(0)
      .max(1000)
      .default(1)
      .describe('the cutoff of the speed estimate, in hertz, above 0'),
  })
  .describe('one-euro smoothing of the angle; absent: off');

const joint = z.strictObject({
  name: nameOf('the name of the joint'),
  channel: channel().describe('the input of the board, counted from 0: 1 for A1, or for the second number of a line'),
  points: leaderPoints(),
  curve: z
    .enum(['straight', 'monotone'])
    .default('straight')
    .describe('how the map runs between points: straight, or a monotone cubic'),
  travel_counts: z
    .tuple([counts(), counts()])
    .describe('what the joint really reaches, [lowest, highest] counts; absent: the outer points')
    .optional(),
  despike: z
    .int()
    .min(1)
    .max(15)
    .default(3)
    .describe('the median window in readings, odd: 3 takes out single spikes for one reading of delay, 1 is off'),
  noise_counts: z
    .number()
    .min(0)
    .max(1e6)
    .describe('the noise of the pot as it stands still, root mean square, in counts; absent: not measured')
    .optional(),
  smooth: smooth.optional(),
  fitted: fitted.optional(),
});

const button = z.strictObject({
  name: nameOf('the name of the button'),
  channel: channel().describe('the input of the board, counted from 0'),
  pressed: z.enum(['below', 'above']).describe('on which side of its counts the button is pressed: below or above'),
  counts: counts().describe('the threshold, in counts'),
  does: z
    .enum(['enable', 'hold', 'clutch', 'stop', 'mark', 'join'])
    .describe('what it does: enable (hold to run), hold, clutch, stop, mark or join'),
});

export const leader = z
  .strictObject({
    leader: nameOf('the name of the leader'),
    ...connection,
    counts: z
      .tuple([counts(), counts()])
      .default([0, 1023])
      .describe('what the converter can read, [lowest, highest] counts: [0, 1023] for 10 bits, [0, 4095] for 12'),
    timeout_ms: z
      .number()
      .gt(0)
      .max(60_000)
      .default(250)
      .describe('the age past which readings start no motion, in milliseconds, above 0'),
    sampling_ms: z
      .int()
      .min(1)
      .max(1000)
      .default(10)
      .describe('the time between readings that a firmata board is asked for, in milliseconds'),
    joints: z.array(joint).min(1).max(64).describe('the joints of the leader, from the base to the tip'),
    buttons: z.array(button).max(32).default([]).describe('pedals and triggers, because both hands are busy'),
    arm: arm.optional(),
  })
  .describe('one leader: the arm held in the hand');

export type LeaderProfile = z.infer<typeof leader>;
export type LeaderJoint = LeaderProfile['joints'][number];
