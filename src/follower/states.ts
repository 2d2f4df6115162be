/**
 * The states of a follower and what moves it between them: the whole of it is this table, which is tested row by row.
 * What a state does with the arm is in `follower.ts`; who raises an event, and when, is in `drive/`.
 */
export const STATES = [
  /** Its port is down, or its board has just restarted. */
  'absent',
  /** Its wake pose is known and shown; no pulses until the operator's go, then one servo after another. */
  'waking',
  /** Moving gently to where the leader is. */
  'joining',
  'following',
  /** Braked, pulses kept. */
  'holding',
  /** Moving gently to its rest pose. */
  'parking',
  /** Pulses ended; what the servos do then is their own matter. */
  'limp',
  /** One servo is being moved by pulse, to be measured. */
  'jogging',
  /** Braked and latched: `rearm`, then `join`. */
  'stopped',
] as const;
export type State = (typeof STATES)[number];

export const EVENTS = [
  /** The port is open and the board has answered. */
  'ready',
  /** It is back within a second and did not restart. */
  'back',
  'down',
  /** The servos have no pulses any more: the board restarted, or power was off. */
  'unpulsed',
  /** The operator saw the wake pose and lets it start, or wants a limp arm awake. */
  'go',
  /** Every servo has its pulses. */
  'awake',
  'join',
  /** It has come to where the leader is. */
  'met',
  /** Something keeps it from following: readings too old, enable released, the operator's hold. */
  'block',
  /** Nothing does any more. */
  'clear',
  /** A pot that was sick is sound again: what it feeds may be far from it. */
  'healed',
  'park',
  /** It stands at its rest pose. */
  'rested',
  'limp',
  'jog',
  'jogged',
  'stop',
  'rearm',
] as const;
export type StateEvent = (typeof EVENTS)[number];

/** An event that a row leaves out changes nothing. */
export const TRANSITIONS: Readonly<Record<State, Partial<Record<StateEvent, State>>>> = {
  absent: { ready: 'waking', back: 'joining', stop: 'stopped' },
  waking: { down: 'absent', awake: 'joining', limp: 'limp', stop: 'stopped' },
  joining: { down: 'absent', unpulsed: 'waking', met: 'following', block: 'holding', park: 'parking', stop: 'stopped' },
  following: {
    down: 'absent',
    unpulsed: 'waking',
    block: 'holding',
    healed: 'joining',
    park: 'parking',
    stop: 'stopped',
  },
  holding: {
    down: 'absent',
    unpulsed: 'waking',
    join: 'joining',
    clear: 'joining',
    park: 'parking',
    limp: 'limp',
    jog: 'jogging',
    stop: 'stopped',
  },
  parking: {
    down: 'absent',
    unpulsed: 'waking',
    join: 'joining',
    block: 'holding',
    rested: 'holding',
    stop: 'stopped',
  },
  limp: { down: 'absent', go: 'waking', stop: 'stopped' },
  jogging: { down: 'absent', unpulsed: 'waking', jogged: 'holding', stop: 'stopped' },
  stopped: { rearm: 'holding' },
};

/** The state after `event`: the same one where the table has no entry. */
export function nextState(state: State, event: StateEvent): State {
  return TRANSITIONS[state][event] ?? state;
}
