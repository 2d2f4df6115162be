import type { CompiledBoard } from '../rig/compiled.ts';
import { servosOf } from '../rig/servo-list.ts';
import type { FollowerProfile } from '../rig/schema/follower.ts';
import { wireName } from '../rig/wire-choice.ts';
import { listed } from './endings.ts';
import { fixed, percent } from './figures.ts';
import { REDUCED_SPEED_MM_S } from './motion.ts';
import type { CheckedFollower } from './checked.ts';

/** StandardFirmata blinks this pin at every boot (firmata/arduino, StandardFirmata.ino and Firmata.cpp). */
const LIGHT_PIN = 13;
/** Pulses a second of the AVR servo library: REFRESH_INTERVAL is 20,000 us (arduino-libraries/Servo, src/Servo.h). */
const AVR_PULSES_HZ = 50;
/** Its timer has twelve slots (SERVOS_PER_TIMER), and the firmata wire needs one of them to make first pulses right. */
const UNO_SERVOS_MAX = 11;
/** A port that carries more than this share has no room for a hiccup. */
const FULL_SHARE = 0.9;
/** From this reach on, an arm that moves unasked is dangerous to stand at (the profile's default asks from here on). */
const ASK_REACH_MM = 300;

/** What an operator should know of one follower, one sentence each. */
export function followerWarnings(profile: FollowerProfile, checked: CheckedFollower): readonly string[] {
  const said = [...motionWarnings(profile, checked), ...electricWarnings(checked), ...firmwareWarnings(profile)];
  return said.map((sentence) => `${checked.follower}: ${sentence}`);
}

function motionWarnings(profile: FollowerProfile, checked: CheckedFollower): readonly string[] {
  const { end_speed_max_mm_s: speed, reach_mm, joints, falling, on_lost_pulse } = checked;
  const said: string[] = [];
  if ((speed ?? 0) > REDUCED_SPEED_MM_S) {
    said.push(
      `it may move at ${fixed(speed, 0)} mm/s, more than 250 mm/s, the reduced speed of ISO 10218-1 (a borrowed figure: no conformity is claimed); tip_speed_mm_s caps it`,
    );
  }
  if (checked.wake !== 'ask' && (reach_mm ?? 0) >= ASK_REACH_MM) {
    said.push(
      `it goes to its ${checked.wake} pose without asking, and reaches ${fixed(reach_mm, 0)} mm; wake: ask waits for the go`,
    );
  }
  for (const { joint, clipped_deg, servo_span_deg, range_deg } of joints) {
    if (clipped_deg === null || (clipped_deg[0] === 0 && clipped_deg[1] === 0)) continue;
    const isServo = range_deg[1] - range_deg[0] >= servo_span_deg - SPAN_SLACK_DEG;
    if (!isServo) continue;
    const short = servo_span_deg < NOMINAL_DEG ? ', short of 180 as servos often are' : '';
    said.push(
      `${joint} clips the leader's travel where its servo ends, after ${fixed(servo_span_deg, 0)} degrees${short}`,
    );
  }
  if (on_lost_pulse === 'unknown' && falling.length > 0)
    said.push(
      `on_lost_pulse is unknown, and ${listed(falling)} would fall: try it by hand, near rest, and write it down`,
    );
  for (const [key, is] of [
    ['load', (one: (typeof joints)[number]) => (one.load_share ?? 0) > 1],
    ['moving_load', (one: (typeof joints)[number]) => (one.moving_share ?? 0) > 1],
  ] as const) {
    const names = joints.filter(is).map(({ joint }) => joint);
    if (profile[key] === 'limit' && names.length > 0)
      said.push(`${key}: limit holds ${listed(names)} back in a part of the range`);
  }
  return said;
}

/** What hobby servos are sold as; many turn less (common practice, no source). */
const NOMINAL_DEG = 180;
/** A range that uses all of the servo's points, up to this much. */
const SPAN_SLACK_DEG = 0.5;

function electricWarnings({
  supply_worst_a,
  supply_a,
  supply_not_counted,
  baud_share,
  baud,
}: CheckedFollower): readonly string[] {
  const said: string[] = [];
  if (supply_a !== null && (supply_worst_a ?? 0) > supply_a) {
    said.push(
      `all its servos at once, starting or blocked, would draw ${fixed(supply_worst_a, 1)} A, and its supply gives ${fixed(supply_a, 1)} A`,
    );
  }
  if (supply_a !== null && supply_worst_a === null)
    said.push('its current cannot be told: no link gives motor: { stall_a }');
  else if (supply_a !== null && supply_not_counted.length > 0)
    said.push(`its current leaves out ${listed(supply_not_counted)}, of which no link gives motor: { stall_a }`);
  if ((baud_share ?? 0) > FULL_SHARE)
    said.push(`its commands take ${percent(baud_share)} of ${baud} baud; raise the baud, or lower rate_hz`);
  return said;
}

/** What published firmware does of its own accord. */
function firmwareWarnings(profile: FollowerProfile): readonly string[] {
  const wire = wireName(profile.wire);
  const said: string[] = [];
  if (wire === 'firmata') {
    const onLight = servosOf(profile).filter(({ servo }) => servo.channel === LIGHT_PIN);
    const names = onLight.flatMap(({ turns }) => Object.keys(turns));
    if (names.length > 0)
      said.push(`the servo of ${listed(names)} hangs on pin 13, which the board blinks as it starts; use another pin`);
    if (profile.power?.channel === LIGHT_PIN)
      said.push(
        'its power hangs on pin 13, which the board blinks as it starts: the relay closes by itself; use another pin',
      );
    if (profile.power?.on === 'low')
      said.push(
        'its power is on when low, and the board drives its pins low as it starts: the relay closes by itself; use one that is on when high',
      );
  }
  if (profile.rate_hz > AVR_PULSES_HZ && wire === 'firmata')
    said.push(
      `of ${profile.rate_hz} commands a second its servos see ${AVR_PULSES_HZ}: the board pulses no faster; rate_hz: ${AVR_PULSES_HZ} is enough`,
    );
  else if (profile.rate_hz > AVR_PULSES_HZ)
    said.push(
      `${profile.rate_hz} commands a second are seen only by servos that are pulsed as often; analog ones take ${AVR_PULSES_HZ} (common practice)`,
    );
  return said;
}

/** What an operator should know of boards that several profiles share. */
export function boardWarnings(boards: readonly CompiledBoard[]): readonly string[] {
  return boards.flatMap(({ wire, address, plan: { outputs } }) => {
    const servos = outputs.reduce((sum, output) => sum + output.servos.length, 0);
    if (wire.name !== 'firmata' || servos <= UNO_SERVOS_MAX) return [];
    const who = listed(outputs.map(({ follower }) => follower));
    return [
      `${who}: ${servos} servos on one board, ${address.text}: an Uno drives ${UNO_SERVOS_MAX} of them with right first pulses; use a larger board, or two`,
    ];
  });
}
