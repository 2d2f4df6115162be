/** What an output pin does; `open` is an input, which drives nothing. */
export type Level = 'high' | 'low' | 'open';

/** One high phase of a pin: what a servo measures. */
export interface Pulse {
  readonly startUs: number;
  readonly widthUs: number;
}

export interface Change {
  readonly atUs: number;
  readonly level: Level;
}

/** An Uno's pins 0 to 19, numbered as the board does; everything they did, to the CPU cycle. */
export interface Pins {
  level(pin: number): Level;
  changes(pin: number): readonly Change[];
  pulses(pin: number): readonly Pulse[];
}

export interface PinRecorder extends Pins {
  /** Eight pins of one register, from `firstPin` up: what is written and which of them are outputs. */
  wrote(firstPin: number, pins: number, value: number, outputs: number, atUs: number): void;
  /** Reset or loss of power: every pin lets go. */
  letGo(atUs: number): void;
}

const PINS = 20;

/** A minute of fifty pulses a second is 6,000 changes; a test that plays longer than this has run away. */
const CHANGES_MAX = 200_000;

export function pinRecorder(): PinRecorder {
  const changes: Change[][] = Array.from({ length: PINS }, () => []);
  const pulses: Pulse[][] = Array.from({ length: PINS }, () => []);

  const level = (pin: number): Level => changes[pin]?.at(-1)?.level ?? 'open';

  const set = (pin: number, next: Level, atUs: number): void => {
    const history = changes[pin] as Change[];
    const last = history.at(-1);
    if (next === (last?.level ?? 'open')) return;
    if (last?.level === 'high') pulses[pin]?.push({ startUs: last.atUs, widthUs: atUs - last.atUs });
    if (history.push({ atUs, level: next }) > CHANGES_MAX) throw new Error(`pin ${pin} changed ${CHANGES_MAX} times`);
  };

  return {
    level,
    changes: (pin) => changes[pin] ?? [],
    pulses: (pin) => pulses[pin] ?? [],
    wrote(firstPin, pins, value, outputs, atUs) {
      for (let bit = 0; bit < pins; bit++) {
        const mask = 1 << bit;
        set(firstPin + bit, (outputs & mask) === 0 ? 'open' : (value & mask) === 0 ? 'low' : 'high', atUs);
      }
    },
    letGo(atUs) {
      for (let pin = 0; pin < PINS; pin++) set(pin, 'open', atUs);
    },
  };
}
