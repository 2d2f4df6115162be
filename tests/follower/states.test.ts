import { describe, expect, it } from 'vitest';
import { EVENTS, nextState, type State, type StateEvent, STATES, TRANSITIONS } from '../../src/follower/states.ts';

/**
 * Typed here once more, from what an operator is promised: a row a state, a column an event, a dot where the state
 * stays. Whoever changes one table has to argue with the other.
 */
const TABLE = `
-         ready   back     down    unpulsed go      awake    join     met        block    clear    healed   park     rested   limp  jog      jogged   stop     rearm
absent    waking  joining  .       .        .       .        .        .          .        .        .        .        .        .     .        .        stopped  .
waking    .       .        absent  .        .       joining  .        .          .        .        .        .        .        limp  .        .        stopped  .
joining   .       .        absent  waking   .       .        .        following  holding  .        .        parking  .        .     .        .        stopped  .
following .       .        absent  waking   .       .        .        .          holding  .        joining  parking  .        .     .        .        stopped  .
holding   .       .        absent  waking   .       .        joining  .          .        joining  .        parking  .        limp  jogging  .        stopped  .
parking   .       .        absent  waking   .       .        joining  .          holding  .        .        .        holding  .     .        .        stopped  .
limp      .       .        absent  .        waking  .        .        .          .        .        .        .        .        .     .        .        stopped  .
jogging   .       .        absent  waking   .       .        .        .          .        .        .        .        .        .     .        holding  stopped  .
stopped   .       .        .       .        .       .        .        .          .        .        .        .        .        .     .        .        .        holding
`;

const [head = [], ...lines] = TABLE.trim()
  .split('\n')
  .map((line) => line.split(/\s+/));
const COLUMNS = head.slice(1);
const ROWS = new Map(lines.map(([state = '', ...cells]) => [state, cells]));

const everyPair = STATES.flatMap((state) => EVENTS.map((event): [State, StateEvent] => [state, event]));

describe('the state table', () => {
  it('has a row for every state and a column for every event, and no other', () => {
    expect([...COLUMNS].toSorted()).toEqual([...EVENTS].toSorted());
    expect([...ROWS.keys()].toSorted()).toEqual([...STATES].toSorted());
    for (const cells of ROWS.values()) expect(cells).toHaveLength(EVENTS.length);
  });

  it.each(everyPair)('%s, when told "%s"', (state, event) => {
    const expected = ROWS.get(state)?.[COLUMNS.indexOf(event)];
    expect(nextState(state, event)).toBe(expected === '.' ? state : expected);
  });
});

describe('the laws of the state table', () => {
  it('an entry leads somewhere else: what changes nothing is left out', () => {
    for (const state of STATES) expect(Object.values(TRANSITIONS[state])).not.toContain(state);
  });

  const leadsTo = (state: State, into: State): StateEvent[] =>
    EVENTS.filter((event) => state !== into && nextState(state, event) === into);

  it('a stop stops everything', () => {
    for (const state of STATES) expect(nextState(state, 'stop')).toBe('stopped');
  });

  it('only rearm leads out of a stop, and to a hold, where nothing moves', () => {
    for (const event of EVENTS) expect(nextState('stopped', event)).toBe(event === 'rearm' ? 'holding' : 'stopped');
  });

  it('rearm does nothing else', () => {
    for (const state of STATES) expect(nextState(state, 'rearm')).toBe(state === 'stopped' ? 'holding' : state);
  });

  it('a lost port makes any follower absent that is not stopped', () => {
    for (const state of STATES) expect(nextState(state, 'down')).toBe(state === 'stopped' ? 'stopped' : 'absent');
  });

  it('a leader is followed only after joining it', () => {
    for (const state of STATES) expect(leadsTo(state, 'following')).toEqual(state === 'joining' ? ['met'] : []);
  });

  it('pulses that have ended come back only through waking', () => {
    expect(leadsTo('limp', 'waking')).toEqual(['go']);
    for (const into of ['joining', 'following', 'holding', 'parking', 'jogging'] as const)
      expect(leadsTo('limp', into)).toEqual([]);
  });

  it('every state can be reached and left', () => {
    const reached = new Set<State>(['absent']);
    for (const state of reached) for (const event of EVENTS) reached.add(nextState(state, event));
    expect([...reached].toSorted()).toEqual([...STATES].toSorted());
    for (const state of STATES) expect(EVENTS.some((event) => nextState(state, event) !== state)).toBe(true);
  });
});
