import { describe, expect, it } from 'vitest';
import { LEADER } from '../../src/drive/events.ts';
import type { CompiledBoard } from '../../src/rig/compiled.ts';
import { MS, S } from '../plans.ts';
import { BOTH_ENDS, Desk, FOLLOWERS_ONLY, output } from './desk.ts';

const READING = '512,512\n';

describe('a board that greets', () => {
  it('says that it is open, that it is waited for after 0.3 s, and that it has greeted', () => {
    const desk = new Desk(BOTH_ENDS).opens();
    expect(desk.said()).toEqual(['opened']);
    desk.passes(299 * MS);
    expect(desk.said()).toEqual([]);
    desk.passes(MS);
    expect(desk.said()).toEqual(['waiting']);
    desk.passes(S).hears(`\n${READING}`);
    expect(desk.said()).toEqual(['greeted']);
    expect(desk.told()).toEqual(['ready 1', `ready ${LEADER}`, 'reading']);
    desk.passes(10 * S);
    expect(desk.said()).toEqual([]);
  });

  it('is not called waited for when it speaks at once', () => {
    const desk = new Desk(BOTH_ENDS)
      .opens()
      .passes(100 * MS)
      .hears(`\n${READING}`)
      .passes(5 * S);
    expect(desk.said()).toEqual(['opened', 'greeted']);
  });

  it('that only listens is taken to be ready when its time to start is over', () => {
    const desk = new Desk(FOLLOWERS_ONLY).opens().passes(2.4 * S);
    expect(desk.told()).toEqual([]);
    desk.passes(0.2 * S);
    expect(desk.told()).toEqual(['ready 1']);
    expect(desk.board.is.ready).toBe(true);
  });

  it('is one event for all its followers, the leader last', () => {
    const desk = new Desk(BOTH_ENDS).opens().hears(`\n${READING}`);
    expect(desk.told().slice(0, 2)).toEqual(['ready 1', `ready ${LEADER}`]);
    desk.closes('PORT_CLOSED');
    expect(desk.told()).toEqual(['down 1', `down ${LEADER}`]);
  });

  it('of another name is refused, told once, and told nothing', () => {
    const named = { ...BOTH_ENDS, plan: { ...BOTH_ENDS.plan, boardName: 'wren' } };
    const desk = new Desk(named)
      .opens()
      .hears('board:stork\n')
      .hears(READING)
      .passes(20 * S)
      .hears(READING);
    expect(desk.told()).toEqual([]);
    expect(desk.words.filter((word) => word.kind === 'stranger')).toEqual([
      { kind: 'stranger', address: 'sim:arm?name=wren', board: 'stork', wanted: 'wren' },
    ]);
    expect(desk.said()).toEqual(['opened', 'stranger']);
  });

  it('and then says that it is another gets nothing more', () => {
    const named = { ...BOTH_ENDS, plan: { ...BOTH_ENDS.plan, boardName: 'wren' } };
    const desk = new Desk(named).opens().hears(`board:wren\n${READING}`);
    expect(desk.told().slice(0, 1)).toEqual(['ready 1']);
    desk.hears('board:stork\n');
    expect(desk.told()).toEqual(['reboot 1', `reboot ${LEADER}`]);
    expect(desk.board.is.ready).toBe(false);
    desk.idles();
    expect(desk.told()).toEqual([]);
  });

  it('anew has restarted: its followers learn of it before it is ready again', () => {
    const desk = new Desk(BOTH_ENDS).opens().hears(`board:wren\n${READING}`);
    desk.told();
    desk.said();
    desk.hears(`board:wren\n${READING}`);
    expect(desk.told()).toEqual(['reboot 1', `reboot ${LEADER}`, 'ready 1', `ready ${LEADER}`, 'reading']);
    expect(desk.said()).toEqual(['rebooted', 'greeted']);
    expect(desk.board.is.reboots).toBe(1);
  });
});

describe('a port', () => {
  const ready = (): Desk => {
    const desk = new Desk(BOTH_ENDS).opens().hears(`\n${READING}`);
    desk.told();
    desk.said();
    return desk;
  };

  it('that takes a command is blocked until it has left, for all followers at once', () => {
    const desk = ready().sends(0);
    expect(desk.written).toEqual(['W1500,1500\n']);
    expect(desk.told()).toEqual(['blocked 1']);
    desk.idles();
    expect(desk.told()).toEqual(['free 1']);
    desk.sends(1);
    expect(desk.told()).toEqual(['blocked 1']);
    expect(desk.board.is.commands).toBe(2);
  });

  it('that is lost is told with its fault, and once however often it cannot be opened', () => {
    const desk = ready().closes('PORT_CLOSED');
    expect(desk.said()).toEqual(['lost_port']);
    desk.closes('PORT_MISSING').closes('PORT_MISSING').closes('PORT_MISSING');
    expect(desk.said()).toEqual(['opening_failed']);
    desk.closes('PORT_BUSY');
    expect(desk.said()).toEqual(['opening_failed']);
    expect(desk.told()).toEqual(['down 1', `down ${LEADER}`]);
    expect(desk.board.is).toMatchObject({ open: false, ready: false, fault: { code: 'PORT_BUSY' } });
    desk.opens().hears(`\n${READING}`);
    expect(desk.said()).toEqual(['opened', 'greeted']);
    expect(desk.board.is.fault).toBeNull();
  });

  it('that was never ready is not told to go down', () => {
    const desk = new Desk(BOTH_ENDS).opens().closes('PORT_CLOSED');
    expect(desk.told()).toEqual([]);
  });

  it('that closes while it is waited for is not waited for any more', () => {
    const desk = new Desk(BOTH_ENDS)
      .opens()
      .passes(100 * MS)
      .closes('PORT_CLOSED')
      .passes(20 * S);
    expect(desk.said()).toEqual(['opened', 'lost_port']);
  });

  it('counts damaged messages always, and tells of them every five seconds at most', () => {
    const desk = ready();
    for (let i = 0; i < 100; i++) desk.hears('noise\n').passes(100 * MS);
    expect(desk.board.is.garbled).toBe(100);
    expect(desk.words.map((word) => word.kind === 'garbled' && word.total)).toEqual([1, 51]);
  });
});

describe('what a wire has to ask', () => {
  const firmata: CompiledBoard = {
    ...BOTH_ENDS,
    wire: { name: 'firmata' },
    plan: {
      ...BOTH_ENDS.plan,
      outputs: [{ ...output('wren'), servos: [{ channel: 5, minUs: 560, maxUs: 2440, joint: 'joint0' }] }],
    },
    followers: [1],
  };

  it('waits for the port, in order, and goes before any follower', () => {
    const desk = new Desk(firmata).opens();
    const bytes = (...values: number[]): void => desk.port.data(Uint8Array.from(values));
    const asked = (): string[] => desk.written.map((text) => Buffer.from(text, 'latin1').toString('hex').slice(0, 4));
    // Version 2.5, then its firmware without a name: the mapping is asked for (0x69, Firmata protocol 2.8, protocol.md).
    bytes(0xf9, 2, 5, 0xf0, 0x79, 2, 5, 0xf7);
    expect(asked()).toEqual(['f069']);
    desk.passes(2.6 * S);
    // Twenty pins, of which the last six are inputs: the sampling interval (0x7a) is set.
    bytes(0xf0, 0x6a, ...Array.from({ length: 20 }, (_, pin) => (pin < 14 ? 127 : pin - 14)), 0xf7);
    expect(asked()).toEqual(['f069']);
    expect(desk.told()).toEqual(['blocked 1', 'ready 1', `ready ${LEADER}`]);
    desk.idles();
    desk.idles();
    expect(asked()).toEqual(['f069', 'f069', 'f07a']);
    expect(desk.told()).toEqual([]);
    desk.idles();
    expect(desk.told()).toEqual(['free 1']);
  });

  it('is forgotten with its connection', () => {
    const desk = new Desk(firmata).opens().passes(5 * S);
    expect(desk.written).toHaveLength(1);
    desk.closes('PORT_CLOSED').opens();
    for (let i = 0; i < 5; i++) desk.idles();
    expect(desk.written).toHaveLength(1);
  });

  it('is asked again after 2.5 s, and every second from then on', () => {
    const desk = new Desk(firmata).opens();
    const counts: number[] = [];
    for (let s = 0; s < 6; s += 0.5) {
      for (let i = 0; i < 20; i++) desk.idles();
      counts.push(desk.written.length);
      desk.passes(0.5 * S);
    }
    const rises = counts.flatMap((count, i) => (i > 0 && count > (counts[i - 1] as number) ? [i * 0.5] : []));
    expect(rises).toEqual([2.5, 3.5, 4.5, 5.5]);
  });
});
