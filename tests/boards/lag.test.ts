/**
 * The time from a pot's step to the first changed pulse, end of pulse, as a servo knows it: from volts to pins, over many
 * phases of the board's sampling and of the servo's frame. What happens between is told from inside, as a budget.
 */
import { beforeAll, describe, expect, it } from 'vitest';
import { median } from './solo.ts';
import { COMMAND_US, FRAME_US, KNOWN_US, READING_US, US_PER_DEG } from './timing.ts';
import { pulseAt, trainOf } from './trains.ts';
import { troupe } from './troupe.ts';
import type { Troupe } from './troupe.ts';
import type { UnoBoard } from './uno.ts';

/** Smoothing and limits as the smallest arm of the demo has them. */
const RIG = `
rig: lag
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  sampling_ms: 10
  joints:
    - { name: plain,    channel: 0, points: [[112, -120], [912, 120]], despike: 3 }
    - { name: smoothed, channel: 1, points: [[112, -120], [912, 120]], despike: 3,
        smooth: { cutoff_hz: 1.5, beta_hz_per_deg_s: 0.08, slope_cutoff_hz: 1 } }
followers:
  - follower: wren
    port: serial:/dev/ttyACM1
    wire: firmata
    rate_hz: 50
    join: { speed: 1 }
    joints:
      - name: plain
        from: plain
        range_deg: [-80, 80]
        speed_deg_s: 200
        accel_deg_s2: 1200
        servo: { channel: 9, points: [[-90, 560], [90, 2440]] }
      - name: smoothed
        from: smoothed
        range_deg: [-80, 80]
        speed_deg_s: 200
        accel_deg_s2: 1200
        servo: { channel: 10, points: [[-90, 560], [90, 2440]] }
`;
const JOINTS = ['plain', 'smoothed'] as const;
type Joint = (typeof JOINTS)[number];
const PINS: Readonly<Record<Joint, number>> = { plain: 9, smoothed: 10 };

const STAGES = ['sampling', 'despike', 'smoothing', 'governor', 'frame'] as const;
type Stage = (typeof STAGES)[number];
/** Microseconds that each stage took. */
type Budget = Readonly<Record<Stage, number>> & { readonly total: number; readonly halfWay: number };

/** Of each kind of step; 100 counts are a jump of 30 degrees, 5 are 1.5 degrees: a hand that begins to move. */
const STEPS = { large: 100, small: 5 } as const;
type Size = keyof typeof STEPS;
const PHASES = 10;
/** Goes through the phases of the sampling interval, 10 ms, in strides of half a millisecond. */
const BETWEEN_US = 640_500;
/**
 * An Uno's resonator is a ceramic one, good to half a percent (from memory). So readings meet every phase of the commands,
 * here in 10 ms / 0.2 % = 5 s, and commands every phase of the servos' frame, in 20 ms / 0.3 % = 6.7 s; at exactly 16 MHz
 * they would meet the one phase that opening the ports has dealt out.
 */
const PACES = { 'serial:/dev/ttyACM0': 0.998, 'serial:/dev/ttyACM1': 1.003 };
/** A change that the pin shows for certain; a pulse is rounded, and off by half a microsecond. */
const SHOWN_US = 1.5;

const UNSMOOTHED_MEDIAN_MAX_US = 45_000;

interface Marks {
  reading: number;
  pose: number;
  shownPose: number;
  command: number;
}

/** One step of both pots at `startUs`: when each stage had passed it on, for each joint. */
class Watch {
  readonly #all: Troupe;
  readonly #counts: Float64Array;
  readonly #pose: Float64Array;
  readonly #sent: Float64Array;
  readonly marks: Readonly<Record<Joint, Marks>> = { plain: unmarked(), smoothed: unmarked() };

  constructor(all: Troupe) {
    const { kernel } = all.live.drive.leader;
    this.#all = all;
    this.#counts = kernel.countsNow.slice();
    this.#pose = kernel.poseRad.slice();
    this.#sent = all.stage('wren').arm.frame.sentUs.slice();
  }

  /** After each event, once the arm has made its command. */
  look(tUs: number): void {
    const { kernel } = this.#all.live.drive.leader;
    const { sentUs } = this.#all.stage('wren').arm.frame;
    for (const [j, joint] of JOINTS.entries()) {
      const marks = this.marks[joint];
      const moved = (now: Float64Array, then: Float64Array): number =>
        Math.abs((now[j] as number) - (then[j] as number));
      const turnedUs = ((moved(kernel.poseRad, this.#pose) * 180) / Math.PI) * US_PER_DEG;
      if (moved(kernel.countsNow, this.#counts) > 1) marks.reading = Math.min(marks.reading, tUs);
      // A filter that is still coming to rest moves its pose by less.
      if (turnedUs > SHOWN_US / 10) marks.pose = Math.min(marks.pose, tUs);
      if (turnedUs > SHOWN_US) marks.shownPose = Math.min(marks.shownPose, tUs);
      if (moved(sentUs, this.#sent) > SHOWN_US) marks.command = Math.min(marks.command, tUs);
    }
  }
}

function unmarked(): Marks {
  const never = Number.POSITIVE_INFINITY;
  return { reading: never, pose: never, shownPose: never, command: never };
}

describe('the lag from a pot to a pin', () => {
  const budgets: Record<Size, Record<Joint, Budget[]>> = {
    large: { plain: [], smoothed: [] },
    small: { plain: [], smoothed: [] },
  };
  let all: Troupe;
  let board: UnoBoard;

  /** End of the first pulse from which on none is what the pulses were before. */
  const changedUs = (pin: number, startUs: number): number => {
    const before = median(trainOf(board, pin, startUs - 200_000, startUs).map(({ widthUs }) => widthUs));
    const train = trainOf(board, pin, startUs - FRAME_US);
    const last = train.findLastIndex(({ widthUs }) => Math.abs(widthUs - before) <= SHOWN_US);
    const first = train[last + 1];
    return first === undefined ? Number.NaN : first.startUs + first.widthUs;
  };

  /** End of the first pulse that has done half of the way: what smoothing costs shows here, not at the first change. */
  const halfWayUs = (pin: number, startUs: number): number => {
    const from = pulseAt(board, pin, startUs).widthUs;
    const to = pulseAt(board, pin, all.clock.nowUs()).widthUs;
    const pulse = trainOf(board, pin, startUs).find(({ widthUs }) => Math.abs(widthUs - to) < Math.abs(from - to) / 2);
    return pulse === undefined ? Number.NaN : pulse.startUs + pulse.widthUs;
  };

  const step = (size: Size, counts: number): void => {
    const startUs = all.clock.nowUs();
    const watch = new Watch(all);
    const watching = all.live.events$.subscribe(({ tUs }) => watch.look(tUs));
    all.turn(counts, counts);
    all.wait(BETWEEN_US);
    watching.unsubscribe();
    for (const joint of JOINTS) {
      const { reading, pose, command, ...marks } = watch.marks[joint];
      // A smaller change of pose may do: the governor rounds towards it.
      const shownPose = Math.min(marks.shownPose, command);
      const endUs = changedUs(PINS[joint], startUs);
      budgets[size][joint].push({
        sampling: reading - startUs,
        despike: pose - reading,
        smoothing: shownPose - pose,
        governor: command - shownPose,
        frame: endUs - command,
        total: endUs - startUs,
        halfWay: halfWayUs(PINS[joint], startUs) - startUs,
      });
    }
  };

  beforeAll(() => {
    all = troupe(RIG, { paces: PACES });
    all.turn(512, 512);
    all.until('the boards answer', 3_000_000, () => all.state('wren') === 'waking');
    board = all.at('serial:/dev/ttyACM1').board;
    all.key('go');
    all.until('wren follows', 2_000_000, () => all.state('wren') === 'following');
    all.wait(300_000);
    for (let phase = 0; phase < PHASES; phase++) {
      const far = phase % 2 === 0;
      const to = 512 + (far ? STEPS.large : STEPS.small);
      step('large', to);
      step('small', to + (far ? STEPS.small : -STEPS.small));
    }
    console.log(table(budgets));
  });

  it('is passed on by every stage in turn', () => {
    for (const size of ['large', 'small'] as const) {
      for (const joint of JOINTS) {
        expect(budgets[size][joint].length).toBe(PHASES);
        for (const budget of budgets[size][joint]) {
          for (const stage of STAGES) expect(budget[stage], `${size}, ${joint}, ${stage}`).toBeGreaterThanOrEqual(0);
          expect(Number.isFinite(budget.total)).toBe(true);
        }
      }
    }
  });

  it('is under 45 ms at the median without smoothing, for a jump and for a hand that begins to move', () => {
    for (const size of ['large', 'small'] as const) {
      expect(median(budgets[size].plain.map(({ total }) => total))).toBeLessThan(UNSMOOTHED_MEDIAN_MAX_US);
    }
  });

  it('is never more than its parts can add up to', () => {
    const mostUs = 2 * READING_US + COMMAND_US + KNOWN_US;
    for (const { total } of [...budgets.large.plain, ...budgets.small.plain]) expect(total).toBeLessThan(mostUs);
  });

  it('costs one reading for the median of three, and nothing for smoothing where the hand jumps', () => {
    // The board samples every 10 ms of its own clock.
    for (const { despike } of budgets.large.plain) expect(Math.abs(despike - 10_000)).toBeLessThan(1_500);
    for (const { smoothing } of budgets.large.smoothed) expect(smoothing).toBe(0);
    for (const { smoothing } of budgets.large.plain) expect(smoothing).toBe(0);
  });
});

/** Medians and worst cases, milliseconds. */
function table(budgets: Readonly<Record<Size, Record<Joint, readonly Budget[]>>>): string {
  const columns = (['large', 'small'] as const).flatMap((size) =>
    JOINTS.map((joint) => ({
      head: `${(STEPS[size] * 0.3).toFixed(1)} deg, ${joint}`,
      budgets: budgets[size][joint],
    })),
  );
  const cell = (values: readonly number[]): string =>
    `${(median(values) / 1000).toFixed(1)} (${(Math.max(...values) / 1000).toFixed(1)})`;
  const rows = [...STAGES, 'total' as const, 'halfWay' as const].map((stage) =>
    [
      (stage === 'halfWay' ? 'half way' : stage).padEnd(10),
      ...columns.map((column) => cell(column.budgets.map((budget) => budget[stage])).padStart(20)),
    ].join(''),
  );
  return [
    `lag budget in ms, median (worst) of ${PHASES} phases, from the pot's step to the end of the first changed pulse,`,
    'and to the end of the first one that is half way there, which is up to the limits of the arm too:',
    [''.padEnd(10), ...columns.map(({ head }) => head.padStart(20))].join(''),
    ...rows,
  ].join('\n');
}
