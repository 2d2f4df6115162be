/** The public library surface: what a program that embeds the bridge may rely on. */
export type { Cancel, Clock } from './clock/clock.ts';
export { realClock, US_PER_MS, US_PER_S } from './clock/clock.ts';
export { type VirtualClock, virtualClock } from './clock/virtual.ts';
export type { Plan } from './drive/plan.ts';
export type { FollowerJointSpec, FollowerSpec, ServoSpec, WeightedSource } from './follower/spec.ts';
export type { ButtonDuty, ButtonSpec, LeaderJointSpec, LeaderSpec, OneEuroSpec } from './leader/spec.ts';
export type { PointMap } from './map/points.ts';
