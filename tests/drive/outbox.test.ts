import { describe, expect, it } from 'vitest';
import { type CommandKind, outbox } from '../../src/drive/outbox.ts';
import { followerSpec, planOf, S } from '../plans.ts';
import { Rehearsal } from './rehearsal.ts';

type Switch = Exclude<CommandKind, 'move'>;

/** What goes out, in order, after these have been asked for. */
function goesOut(...asked: Switch[]): CommandKind[] {
  const pending = outbox();
  for (const kind of asked) pending.ask(kind);
  const out: CommandKind[] = [];
  while (pending.some) out.push(pending.take());
  return out;
}

describe('switching commands that wait for a port', () => {
  it('go out most urgent first: power off, the end of pulses, power on', () => {
    expect(goesOut('limp', 'power_off')).toEqual(['power_off', 'limp']);
    expect(goesOut('power_on', 'limp')).toEqual(['limp', 'power_on']);
  });

  it('go out once each, however often they were asked for', () => {
    expect(goesOut('limp', 'limp', 'power_off', 'power_off', 'limp')).toEqual(['power_off', 'limp']);
  });

  it('take their contrary back: the last word on power is the one that counts', () => {
    expect(goesOut('power_on', 'power_off')).toEqual(['power_off']);
    expect(goesOut('power_off', 'power_on')).toEqual(['power_on']);
    expect(goesOut('power_on', 'power_off', 'power_on')).toEqual(['power_on']);
  });

  it('outlast their port: an arm that was to go limp does so when it is back', () => {
    for (const kept of [true, false]) {
      const on = new Rehearsal(planOf([followerSpec()])).following().key('hold').plays(S);
      on.board('blocked')
        .key('limp')
        .board('down')
        .plays(0.3 * S);
      on.told.length = 0;
      on.board('ready', 0, kept).plays(S);
      expect(on.told.map((told) => told.kind)).toEqual(['limp']);
    }
  });

  it('never switch power on again behind a stop', () => {
    const plan = planOf([followerSpec(undefined, { stopCategory: 0, hasPower: true, wake: 'ask' })]);
    const on = new Rehearsal(plan).ready().plays(0.1 * S);
    on.told.length = 0;
    on.board('blocked')
      .key('go')
      .key('stop')
      .board('free')
      .plays(2 * S);
    expect(on.told.map((told) => told.kind)).toEqual(['power_off', 'limp']);
  });
});
