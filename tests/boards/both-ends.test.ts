/** One board with both ends, and the starters that a new user begins from: as they stand, on real firmware. */
import { fileURLToPath } from 'node:url';
import { beforeAll, describe, expect, it } from 'vitest';
import { straight, within } from './by-hand.ts';
import { median } from './solo.ts';
import { COMMAND_US, US_PER_DEG } from './timing.ts';
import { effort, trainOf, widthsOf } from './trains.ts';
import { troupe } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';

const RIG = `
rig: one-board
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  board: StandardFirmata
  joints:
    - { name: base,     channel: 0, points: [[130, -90], [512, 0], [894, 90]] }
    - { name: shoulder, channel: 1, points: [[130, -90], [512, 0], [894, 90]] }
    - { name: elbow,    channel: 5, points: [[130, -90], [512, 0], [894, 90]] }
followers:
  - follower: wren
    port: serial:/dev/ttyACM0
    wire: firmata
    join: { speed: 1 }
    joints:
      - name: base
        from: base
        range_deg: [-80, 80]
        speed_deg_s: 90
        accel_deg_s2: 400
        servo: { channel: 9, points: [[-90, 560], [90, 2440]] }
      - name: elbow
        from: { shoulder: 1, elbow: 0.5 }
        direction: reversed
        range_deg: [-60, 60]
        speed_deg_s: 90
        accel_deg_s2: 400
        servo: { channel: 10, points: [[-90, 560], [90, 2440]] }
  - follower: heron
    port: serial:/dev/ttyACM0
    wire: firmata
    join: { speed: 1 }
    joints:
      - name: shoulder
        from: shoulder
        gain: 0.5
        offset_deg: 10
        range_deg: [-45, 45]
        speed_deg_s: 90
        accel_deg_s2: 400
        servo: { channel: 11, points: [[-90, 2440], [90, 560]] }
`;

const pot = (counts: number): number =>
  straight(
    [
      [130, -90],
      [512, 0],
      [894, 90],
    ],
    counts,
  );

/** The pulses of pins 9, 10 and 11, by hand, rounded as the wire does. */
function byHand([base, shoulder, elbow]: readonly [number, number, number]): Map<number, number> {
  const turned = within(-80, 80, pot(base));
  const bent = within(-60, 60, -(pot(shoulder) + 0.5 * pot(elbow)));
  const raised = within(-45, 45, 0.5 * pot(shoulder) + 10);
  return new Map([
    [9, Math.round(1500 + turned * US_PER_DEG)],
    [10, Math.round(1500 + bent * US_PER_DEG)],
    [11, Math.round(1500 - raised * US_PER_DEG)],
  ]);
}

describe('one board with both ends', () => {
  let all: Troupe;
  let board: UnoBoard;
  let goUs: number;
  const follow = (): boolean => all.state('wren') === 'following' && all.state('heron') === 'following';
  /** A0, A1 and A5. */
  const hold = ([base, shoulder, elbow]: readonly [number, number, number]): void =>
    all.turn(base, shoulder, 0, 0, 0, elbow);

  beforeAll(() => {
    all = troupe(RIG);
    hold([512, 512, 512]);
    all.until('the board answers', 3_000_000, () => all.state('wren') === 'waking' && all.state('heron') === 'waking');
    board = all.at('serial:/dev/ttyACM0').board;
    goUs = all.clock.nowUs();
    all.key('go');
    all.until('both follow', 3_000_000, follow);
  });

  it('is one port, opened once and greeted once', () => {
    expect(all.words.map(({ kind }) => kind)).toEqual(['opened', 'waiting', 'greeted']);
    expect(all.live.status().boards.map(({ leads, followers }) => [leads, followers])).toEqual([
      [true, ['wren', 'heron']],
    ]);
  });

  it('agrees with the remap done by hand: the median of 50 pulses within 1 us, each within 10', () => {
    // The first line on paper: 300, 700 and 250 counts are -49.948, 44.293 and -61.728 degrees; 1500 - 521.7 = 978.3,
    // -(44.293 - 30.864) = -13.429 gives 1359.7, and 0.5 * 44.293 + 10 = 32.147 gives 1500 - 335.8 = 1164.2 us.
    expect([...byHand([300, 700, 250]).values()]).toEqual([978, 1360, 1164]);
    for (const counts of [
      [300, 700, 250],
      [700, 400, 600],
    ] as const) {
      hold(counts);
      all.wait(1_500_000);
      const sinceUs = all.clock.nowUs();
      all.wait(51 * 20_100);
      for (const [pin, us] of byHand(counts)) {
        const off = widthsOf(trainOf(board, pin, sinceUs).slice(0, 50)).map((width) => width - us);
        expect(off.length).toBe(50);
        expect(Math.abs(median(off)), `counts ${counts.join()}, pin ${pin}`).toBeLessThanOrEqual(1);
        for (const one of off) expect(Math.abs(one), `counts ${counts.join()}, pin ${pin}`).toBeLessThanOrEqual(10);
      }
    }
  });

  it('keeps the limits of every servo while its own pots stream', () => {
    const limits = { speed: 90 * US_PER_DEG, accel: 400 * US_PER_DEG, commandUs: COMMAND_US };
    for (const pin of [9, 10, 11]) {
      const { speed, accel, speedShown } = effort(trainOf(board, pin, goUs), 10, limits);
      expect(speed, `pin ${pin}`).toBeLessThanOrEqual(1);
      expect(accel, `pin ${pin}`).toBeLessThanOrEqual(1);
      expect(speedShown, `pin ${pin}`).toBeGreaterThan(0.2);
    }
  });

  it('has a reading every 10 ms all the while', () => {
    const before = all.live.status().boards[0]?.readings ?? 0;
    all.wait(1_000_000);
    expect(Math.abs((all.live.status().boards[0]?.readings ?? 0) - before - 100)).toBeLessThanOrEqual(1);
  });
});

describe('the starters for firmata', () => {
  it.each([
    ['firmata-one-board.yaml', 'wren', 'serial:/dev/ttyACM0'],
    ['firmata-two-boards.yaml', 'heron', 'serial:/dev/ttyACM1'],
  ])('%s runs as it stands, from the first pulse on', (name, follower, address) => {
    const onDisk = fileURLToPath(new URL(`../../profiles/starters/${name}`, import.meta.url));
    const all = troupe({ onDisk });
    // Its points have 512 counts at 0 degrees, where every joint rests.
    all.turn(512, 512, 512);
    all.until('the boards answer', 3_000_000, () => all.state(follower) === 'waking');
    expect(all.words.filter(({ kind }) => kind === 'lacks')).toEqual([]);
    const { board } = all.at(address);
    for (const pin of [9, 10, 11]) expect(board.pulses(pin)).toEqual([]);
    all.key('go');
    all.until('it follows', 2_000_000, () => all.state(follower) === 'following');
    const metUs = all.clock.nowUs();
    // 100 counts are 23.56 degrees, at a quarter of 60 deg/s: 1.6 s and a little, as the limits open.
    all.turn(612, 612, 612);
    all.wait(2_200_000);
    for (const [pin, us] of [
      [9, 1746],
      [10, 1746],
      [11, 1254],
    ] as const) {
      const train = trainOf(board, pin, metUs);
      expect(Math.abs((train[0]?.widthUs ?? Number.NaN) - 1500), `pin ${pin}`).toBeLessThanOrEqual(10);
      expect(Math.abs((train.at(-1)?.widthUs ?? Number.NaN) - us), `pin ${pin}`).toBeLessThanOrEqual(10);
      const slow = { speed: 0.25 * 60 * US_PER_DEG, accel: 240 * US_PER_DEG, commandUs: COMMAND_US };
      expect(effort(train, 15, slow).speed, `pin ${pin}`).toBeLessThanOrEqual(1);
    }
  });
});
