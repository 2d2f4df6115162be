import { z } from 'zod';
import { arm, keepOut, supply } from './arm.ts';
import { connection } from './connection.ts';
import { fitted } from './fitted.ts';
import {
  channel,
  degrees,
  degreesAmount,
  degreesPerSecond,
  degreesPerSecondSquared,
  factor,
  at,
  nameOf,
  positive,
  servoPoints,
  weights,
} from './quantities.ts';

const servoKeys = {
  channel: channel().describe('the output of the board that the servo hangs on, counted from 0'),
  points: servoPoints(),
  deadband_us: z
    .number()
    .min(0)
    .max(1000)
    .default(0)
    .describe('the change of pulse that the servo does not answer, in microseconds, from its data sheet'),
  fitted: fitted.optional(),
};

const joint = z.strictObject({
  name: nameOf('the name of the joint'),
  from: z
    .union([nameOf('a leader joint'), weights('leader joints with their weights')])
    .describe(
      'the leader joint it copies, or a weighted sum such as { shoulder: 1, elbow: -0.5 }; absent: it stays at rest_deg',
    )
    .optional(),
  gain: factor().default(1).describe('how far it turns for one degree of the leader, above 0'),
  direction: z.enum(['same', 'reversed']).default('same').describe('which way it turns: same or reversed'),
  offset_deg: degrees().default(0).describe('its angle where the leader joint stands at zero, in degrees'),
  stretch: z
    .boolean()
    .default(false)
    .describe('true: the leader joint’s travel is laid over range_deg; replaces gain and offset_deg'),
  range_deg: z.tuple([degrees(), degrees()]).describe('the angles it may have, [lowest, highest] degrees'),
  deadband_deg: degreesAmount().default(0).describe('the motion of the leader that it does not answer, in degrees'),
  speed_deg_s: degreesPerSecond().describe('its highest speed, in degrees per second, above 0'),
  accel_deg_s2: degreesPerSecondSquared().describe('its highest acceleration, in degrees per second squared, above 0'),
  rest_deg: degrees().default(0).describe('the angle it is parked at, in degrees'),
  servo: z.strictObject(servoKeys).describe('the servo that turns it alone').optional(),
  fitted: fitted.optional(),
});

const coupledServo = z.strictObject({
  channel: servoKeys.channel,
  turns: weights('the joints whose weighted sum is this servo’s angle, such as { shoulder: 1, elbow: 1 }'),
  points: servoKeys.points,
  deadband_us: servoKeys.deadband_us,
  fitted: servoKeys.fitted,
});

const tip = z
  .strictObject({
    scale: factor()
      .describe('its lengths for one of the leader’s, above 0; absent: the ratio of their reaches')
      .optional(),
    origin_mm: at('how far the copy is moved, [x, y, z] in millimetres, in its own level frame').default([0, 0, 0]),
    mirror: z.boolean().default(false).describe('true: left and right change places'),
    turn_deg: degrees().default(0).describe('how far the copy is turned about the vertical, in degrees'),
    keep_pitch: z
      .boolean()
      .default(false)
      .describe('true: the last link keeps the pitch of the leader’s last link, where a joint is free for it'),
  })
  .describe('with follow: tip, how the leader’s tip becomes its own');

export const follower = z
  .strictObject({
    follower: nameOf('the name of the follower'),
    ...connection,
    rate_hz: z.number().min(1).max(1000).default(50).describe('commands a second, in hertz'),
    follow: z.enum(['joints', 'tip']).default('joints').describe('what it copies: joints, or the tip'),
    tip: tip.optional(),
    join: z
      .strictObject({
        speed: positive(1).default(0.25).describe('the share of the speed limits while joining, above 0, at most 1'),
        meet: z
          .enum(['move', 'wait'])
          .default('move')
          .describe('move: go gently to the leader; wait: stand until the leader passes within 3 degrees'),
      })
      .prefault({})
      .describe('how it joins the leader'),
    wake: z
      .enum(['ask', 'rest', 'last'])
      .optional()
      .describe(
        'which pose the first pulse assumes: ask shows it and waits; absent: rest if the arm reaches less than 300 mm, else ask',
      ),
    stop_category: z
      .literal([0, 1, 2])
      .default(2)
      .describe('how it stops: 0 removes power at once, 1 brakes and removes power, 2 brakes and holds'),
    power: z
      .strictObject({
        channel: channel().describe('the output of the board that drives the relay or contactor, counted from 0'),
        on: z.enum(['high', 'low']).default('high').describe('the level that switches the power on: high or low'),
      })
      .describe('a board output that switches the power of the servos')
      .optional(),
    on_lost_pulse: z
      .enum(['limp', 'hold', 'unknown'])
      .default('unknown')
      .describe('what these servos do when pulses end: limp, hold or unknown'),
    joints: z.array(joint).min(1).max(64).describe('the joints of the follower, from the base to the tip'),
    servos: z
      .array(coupledServo)
      .max(64)
      .default([])
      .describe(
        'servos that turn several joints, or share one: where a joint has two servos or a linkage couples joints',
      ),
    poses: z
      .record(nameOf('the name of the pose'), z.record(nameOf('a joint name'), degrees()))
      .default({})
      .describe('named poses: joints with their angles in degrees; joints left out stand at rest'),
    tip_speed_mm_s: positive(1e5)
      .describe('the cap on the speed of every link end, in millimetres per second, above 0')
      .optional(),
    load: z
      .enum(['warn', 'limit'])
      .default('warn')
      .describe('what happens at a torque over the motor’s share: warn or limit'),
    moving_load: z
      .enum(['warn', 'limit'])
      .default('warn')
      .describe('what happens where speeding up takes more than the motor’s share: warn, or limit the acceleration'),
    arm: arm.optional(),
    keep_out: keepOut.default([]),
    supply: supply.optional(),
  })
  .describe('one follower: an arm that copies the leader');

export type FollowerProfile = z.infer<typeof follower>;
export type FollowerJoint = FollowerProfile['joints'][number];
