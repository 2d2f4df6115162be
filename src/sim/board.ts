import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';
import type { Address } from '../port/address.ts';
import { type FarEnd, memoryPort, type MemoryPortOptions } from '../port/memory.ts';
import type { Port } from '../port/types.ts';
import type { WireChoice } from '../wire/choice.ts';
import type { BoardPlan } from '../wire/types.ts';
import { firmataBoard } from './firmata-board.ts';
import type { Firmware, Pins } from './firmware.ts';
import { framesBoard } from './frames-board.ts';
import { type HandOptions, simulatedHand } from './hand.ts';
import { linesBoard } from './lines-board.ts';
import { random } from './random.ts';
import { type ArmOptions, type ServoArm, servoArm } from './servo-arm.ts';

/**
 * A board behind a `sim:` address, with the hand and the arms that hang on it. Unless told otherwise it resets when its port
 * opens, as many boards do, and then its servos have no pulses until it is told some.
 */
export interface SimulatedBoard {
  /** Where the bridge talks to it. */
  readonly port: Port;
  /** The other end of that port: pulls the cable, blocks, corrupts. */
  readonly far: FarEnd;
  /** Parallel to `plan.outputs`. */
  readonly arms: readonly ServoArm[];
  /** Readings sent and commands received up to now, the lost ones included. */
  readonly messages: number;
  readonly lost: number;
  /** Presses its reset button: pulses and power end, and it boots again. */
  reset(): void;
}

export interface SimulatedBoardOptions {
  readonly clock: Clock;
  /** `seed` decides hand, noise and losses (1 when absent); `drop` is the share of readings and commands that get lost; `name` is the board's, where the wire tells it. */
  readonly address: Extract<Address, { kind: 'sim' }>;
  readonly wire: WireChoice;
  readonly plan: BoardPlan;
  /** Inputs parallel to `plan.inputs.channels`; null when the plan has no inputs. */
  readonly hand: Omit<HandOptions, 'seed'> | null;
  /** Parallel to `plan.outputs`, servos parallel to theirs. */
  readonly arms: readonly ArmOptions[];
  /** Whether opening its port resets it, as DTR does on many boards; true when absent. A network board runs on. */
  readonly resets?: boolean;
  /** From reset to the firmware's first word; 0.3 s when absent. */
  readonly bootUs?: number;
  /** Speed and portions of the line; none when absent. */
  readonly line?: MemoryPortOptions;
}

const SEED = 1;
const BOOT_US = 300 * US_PER_MS;
/** Streams 0 and 1 of the seed belong to the hand. */
const LOSSES = 2;

export function simulatedBoard(options: SimulatedBoardOptions): SimulatedBoard {
  const { clock, address, plan } = options;
  checkParallel(options);
  const seed = Number(address.options.get('seed') ?? SEED);
  const drop = Number(address.options.get('drop') ?? 0);
  const bootUs = options.bootUs ?? BOOT_US;
  const { port, far } = memoryPort(clock, address.text, options.line);
  const arms = options.arms.map((each) => servoArm(clock, each));
  const hand = options.hand === null ? null : simulatedHand({ ...options.hand, seed });
  const counts = new Float64Array(plan.inputs?.channels.length ?? 0);
  const losses = random(seed, LOSSES);
  const bornUs = clock.nowUs();

  let messages = 0;
  let lost = 0;
  let resetUs = bornUs;
  let booted: Firmware | null = null;
  let nextSampleUs = 0;
  let cancel: Cancel = () => {};

  const pins: Pins = {
    send: (bytes) => far.write(bytes),
    boardUs: () => clock.nowUs() - resetUs,
    read() {
      hand?.countsAt(clock.nowUs() - bornUs, counts);
      return counts;
    },
    pulse: (output, servo, pulseUs) => arms[output]?.pulse(servo, pulseUs),
    power: (output, on) => arms[output]?.power(on),
    loses() {
      messages++;
      const loses = losses.uniform() < drop;
      if (loses) lost++;
      return loses;
    },
  };

  const cutPins = (): void => {
    arms.forEach((arm, output) => {
      for (let servo = 0; servo < arm.servos; servo++) arm.pulse(servo, Number.NaN);
      if (plan.outputs[output]?.power) arm.power(false);
    });
  };

  const boot = (): void => {
    const firmware = load(options, pins);
    booted = firmware;
    firmware.start();
    resume(firmware);
  };

  const resume = (firmware: Firmware): void => {
    nextSampleUs = clock.nowUs();
    // Without inputs, or without anybody to hear of them, there is nothing to wake up for.
    if (plan.inputs !== null && far.isOpen) sampleNext(firmware);
  };

  // Samples keep to their grid however late a wake-up comes; those a late one has missed are not made up for.
  const sampleNext = (firmware: Firmware): void => {
    nextSampleUs += firmware.samplingUs * Math.max(1, Math.ceil((clock.nowUs() - nextSampleUs) / firmware.samplingUs));
    cancel = clock.at(nextSampleUs, () => {
      firmware.sample();
      sampleNext(firmware);
    });
  };

  const reset = (): void => {
    cancel();
    booted = null;
    resetUs = clock.nowUs();
    cutPins();
    cancel = clock.at(resetUs + bootUs, boot);
  };

  cutPins();
  far.listen({
    opened() {
      if (booted === null || options.resets !== false) reset();
      else resume(booted);
    },
    data: (bytes) => booted?.receive(bytes),
    // It keeps its pulses: only a fresh opening resets it.
    closed: () => cancel(),
  });

  return {
    port,
    far,
    arms,
    get messages() {
      return messages;
    },
    get lost() {
      return lost;
    },
    reset,
  };
}

function load(options: SimulatedBoardOptions, pins: Pins): Firmware {
  const { address, wire, plan, arms } = options;
  const name = address.options.get('name') ?? plan.boardName;
  switch (wire.name) {
    case 'lines':
      return linesBoard(name, wire.lines, plan, arms, pins);
    case 'frames':
      return framesBoard(name ?? address.what, plan, pins);
    case 'firmata':
      return firmataBoard(name ?? address.what, plan, pins);
  }
}

/** What is said of a board in the plan and here is parallel; anything else is our own mistake. */
function checkParallel({ address, plan, hand, arms }: SimulatedBoardOptions): void {
  const inputs = plan.inputs?.channels.length ?? 0;
  if ((hand?.inputs.length ?? 0) !== inputs)
    throw new RangeError(`${address.text}: the plan has ${inputs} inputs, the hand ${hand?.inputs.length ?? 0}`);
  const wired = plan.outputs.map((output) => output.servos.length).join();
  const built = arms.map((arm) => arm.servos.length).join();
  if (wired !== built) throw new RangeError(`${address.text}: the plan wires servos ${wired}, the arms have ${built}`);
}
