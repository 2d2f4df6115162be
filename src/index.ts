/**
 * The public surface: what a program needs to load rigs, drive them, trace readings through them, and use the kernels
 * alone. Units inside are SI: radians, metres, kilograms, seconds in speeds, and integer microseconds for time.
 */

// Time
export { type Cancel, type Clock, realClock } from './clock/clock.ts';
export { type VirtualClock, virtualClock } from './clock/virtual.ts';

// Rig files
export type { CompiledBoard, CompiledRig } from './rig/compiled.ts';
export { loadProfile, loadRig, type LoadedProfile, type LoadedRig, type Refused } from './rig/load.ts';
export type { ReadFile } from './rig/file-reader.ts';
export { mistakeLine, type ProfileMistake } from './rig/mistake.ts';
export { jsonSchema } from './rig/schema/json-schema.ts';

// Driving
export { live, type Live, type LiveOptions, type LiveStatus } from './bridge/live.ts';
export { type OnCommand, trace, type Trace } from './bridge/trace.ts';
export { simulatedFor } from './bridge/simulated.ts';
export { type Sentence, sentences } from './bridge/words.ts';
export type { Word } from './bridge/board.ts';
export { wakeMemory, wakeMemoryFile, type WakeMemory } from './bridge/wake-memory.ts';
export { withFollowers } from './bridge/selection.ts';
export type { DriveEvent, Key } from './drive/events.ts';
export type { DriveStatus } from './drive/status.ts';
export type { Plan } from './drive/plan.ts';

// Ports and wires
export { type Address, type AddressMistake, parseAddress } from './port/address.ts';
export { openPort } from './port/open.ts';
export { type FarEnd, memoryPort } from './port/memory.ts';
export type { Port, PortFault, PortFaultCode, PortListener } from './port/types.ts';
export { openSession } from './wire/session.ts';
export type { WireChoice } from './wire/choice.ts';
export type { BoardPlan, Frame, WireEvent, WireSession } from './wire/types.ts';

// Kernels
export { compileMap } from './map/compile.ts';
export type { PointMap } from './map/points.ts';
export { leader, type Leader } from './leader/leader.ts';
export type { ButtonSpec, LeaderJointSpec, LeaderSpec, OneEuroSpec } from './leader/spec.ts';
export { oneEuro, type OneEuro } from './leader/one-euro.ts';
export { governor, type Governor } from './follower/governor.ts';
export type { FollowerJointSpec, FollowerSpec, ServoSpec, TipSpec, WholeArmSpec } from './follower/spec.ts';
export { chain, type Chain } from './arm/chain.ts';
export { inverse, type Inverse } from './arm/inverse.ts';
export type { ArmSpec, KeepOut, LinkSpec } from './arm/spec.ts';
