import { leader, type Leader } from '../leader/leader.ts';
import { ILLS } from '../leader/health.ts';
import type { ButtonDuty } from '../leader/spec.ts';
import { ALL, LEADER, type DriveEvent, type Key, type KeyEvent, type PoseEvent } from './events.ts';
import type { Plan } from './plan.ts';
import type { Shared } from './shared.ts';
import { unison, type Unison } from './unison.ts';

/** The leader's part of the drive: conditions readings, watches contact and buttons, and moves the virtual leader. */
export interface LeaderStage {
  readonly kernel: Leader;
  /** The pose followers follow, radians: the conditioned one, or the virtual leader's in unison. */
  readonly poseRad: Float64Array;
  /** Its speed, rad/s; null where it is not known (no unison). */
  readonly speedRadS: Float64Array | null;
  /** True while the last reading is older than the timeout, or the leader's port is down. */
  readonly stale: boolean;
  /** False while an enable button exists and is not held. */
  readonly enabled: boolean;
  /** True while a clutch button is held. */
  readonly clutched: boolean;
  /** True while a hold button is held. */
  readonly holding: boolean;
  /** Followers go where `target` events say. */
  readonly byTargets: boolean;
  /** The event being handled says anew where the leader is. */
  readonly fresh: boolean;
  /** Grows whenever somebody else leads. */
  readonly leadVersion: number;
  /** Grows whenever the set of sick joints changes. */
  readonly healthVersion: number;
  /** Instant of the last reading or pose, integer microseconds; -Infinity before the first. */
  readonly lastUs: number;
  /** Keys that this event's buttons stand for: the first `pressedCount` of `pressed`. */
  readonly pressed: readonly KeyEvent[];
  readonly pressedCount: number;
  take(event: DriveEvent): void;
  /** When it has to be woken although nothing arrives: the instant contact is lost. */
  dueUs(): number;
  /** A bug of ours was caught: no reading is worth anything any more. */
  giveUp(): void;
}

const SILENT = ILLS.indexOf('silent');

/** What a press of a button asks of all followers; the others are levels. */
const KEY_OF: Readonly<Partial<Record<ButtonDuty, Key>>> = { stop: 'stop', join: 'join', mark: 'mark' };

export function leaderStage(plan: Plan, common: Shared): LeaderStage {
  const kernel = leader(plan.leader);
  const virtual: Unison | null = plan.unison ? unison(plan.followers, plan.leader.joints.length) : null;
  const specs = plan.leader.buttons;
  const hasEnable = specs.some((b) => b.does === 'enable');
  const health = kernel.health.state;
  const healthBefore = Uint8Array.from(health);
  const pressed = specs.map((): { -readonly [K in keyof KeyEvent]: KeyEvent[K] } => ({
    kind: 'key',
    tUs: 0,
    key: 'mark',
    follower: ALL,
    value: 0,
  }));

  const posed = new Uint8Array(health.length);
  const takenRad = new Float64Array(health.length);
  /** What the hand says of every joint, whoever leads. */
  const handRad = new Float64Array(health.length).fill(Number.NaN);
  const heard = { handUs: Number.NEGATIVE_INFINITY, takeUs: Number.NEGATIVE_INFINITY };

  const readButtons = (tUs: number): void => {
    self.enabled = !hasEnable;
    self.clutched = false;
    self.holding = false;
    for (let b = 0; b < specs.length; b++) {
      const does = (specs[b] as (typeof specs)[number]).does;
      const down = kernel.buttons.down[b] === 1;
      if (does === 'enable' && down) self.enabled = true;
      if (does === 'clutch' && down) self.clutched = true;
      if (does === 'hold' && down) self.holding = true;
      const key = KEY_OF[does];
      if (key === undefined || kernel.buttons.edge[b] !== 1) continue;
      const event = pressed[self.pressedCount++] as (typeof pressed)[number];
      event.tUs = tUs;
      event.key = key;
    }
  };

  const impose = (j: number, poseRad: Float64Array): void => {
    const angle = poseRad[j] as number;
    const known = Number.isFinite(angle);
    if (known) kernel.poseRad[j] = angle;
    health[j] = known ? 0 : SILENT;
  };

  /** A pose is sound as far as it goes; a joint it has no angle for is not heard. */
  const adopt = (poseRad: Float64Array): void => {
    for (let j = 0; j < health.length; j++) impose(j, poseRad);
  };

  const takePose = ({ tUs, poseRad }: PoseEvent): void => {
    if (posed.includes(1)) {
      takenRad.set(poseRad);
      imposeTaken();
      heard.takeUs = tUs;
    } else {
      adopt(poseRad);
      handRad.set(kernel.poseRad);
      heard.handUs = tUs;
    }
  };

  /** Joints that a take leads keep its angles, whatever the hand does meanwhile; one it has no angle for is not heard. */
  const imposeTaken = (): void => {
    for (let j = 0; j < health.length; j++) {
      if (posed[j] === 1) impose(j, takenRad);
      else if (self.byTargets) health[j] = 0;
      // Under the take's commands it was called sound, but the hand has not said it yet.
      else if (Number.isNaN(kernel.poseRad[j] as number)) health[j] = SILENT;
    }
  };

  /** What was never heard, or went down with its port, is too old even for a board that speaks on change only. */
  const isTooOld = (ageUs: number): boolean => ageUs > plan.leader.timeoutUs || ageUs === Number.POSITIVE_INFINITY;

  const noteSources = (): void => {
    const isAll = self.byTargets || !posed.includes(0);
    const isNone = !self.byTargets && !posed.includes(1);
    self.lastUs = isNone ? heard.handUs : isAll ? heard.takeUs : Math.min(heard.handUs, heard.takeUs);
    // A pedal that is not heard is not held, whoever leads.
    if (isTooOld((common.nowUs[0] as number) - heard.handUs)) self.enabled = !hasEnable;
  };

  const noteHealth = (): void => {
    for (let j = 0; j < health.length; j++) {
      if (health[j] === healthBefore[j]) continue;
      healthBefore.set(health);
      self.healthVersion++;
      return;
    }
  };

  const self: { -readonly [K in keyof LeaderStage]: LeaderStage[K] } = {
    kernel,
    poseRad: virtual?.poseRad ?? kernel.poseRad,
    speedRadS: virtual?.speedRadS ?? null,
    stale: true,
    enabled: !hasEnable,
    clutched: false,
    holding: false,
    byTargets: false,
    fresh: false,
    leadVersion: 0,
    healthVersion: 0,
    lastUs: Number.NEGATIVE_INFINITY,
    pressed,
    pressedCount: 0,
    take(event) {
      common.nowUs[0] = event.tUs;
      common.taken.fill(0);
      self.pressedCount = 0;
      self.fresh = !self.byTargets && (event.kind === 'pose' || (event.kind === 'reading' && posed.includes(0)));
      // The virtual leader first moves towards what was known until now.
      if (virtual !== null) {
        virtual.limit(common.following, common.opened, common.pace);
        virtual.advance(kernel.poseRad, common.nowUs);
      }
      if (event.kind === 'reading') {
        kernel.poseRad.set(handRad);
        kernel.take(event.tUs, event.counts);
        handRad.set(kernel.poseRad);
        imposeTaken();
        heard.handUs = event.tUs;
        readButtons(event.tUs);
        noteHealth();
      } else if (event.kind === 'pose') {
        takePose(event);
        noteHealth();
      } else if (event.kind === 'target') {
        heard.takeUs = event.tUs;
      } else if (event.kind === 'lead') {
        posed.set(event.posed);
        self.byTargets = event.targets;
        self.leadVersion++;
        takenRad.set(kernel.poseRad);
        kernel.poseRad.set(handRad);
        imposeTaken();
        noteHealth();
      } else if (event.kind === 'key' && event.key === 'pace') {
        // A share, whoever sends it: never over the profile's limits, and never what is no number.
        if (!Number.isNaN(event.value)) common.pace[0] = Math.min(Math.max(event.value, 0), 1);
      } else if (event.kind === 'down' && event.follower === LEADER) {
        heard.handUs = Number.NEGATIVE_INFINITY;
      }
      noteSources();
      virtual?.meet(kernel.poseRad);
      self.stale = isTooOld(event.tUs - self.lastUs);
    },
    dueUs() {
      // One microsecond past the timeout is the first integer instant at which the reading is too old.
      const sinceUs = hasEnable && self.enabled ? Math.min(self.lastUs, heard.handUs) : self.lastUs;
      return self.stale ? Number.POSITIVE_INFINITY : sinceUs + plan.leader.timeoutUs + 1;
    },
    giveUp() {
      self.lastUs = Number.NEGATIVE_INFINITY;
      self.stale = true;
    },
  };
  return self;
}
