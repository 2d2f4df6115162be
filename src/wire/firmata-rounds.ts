import { NO_CHANNEL } from './firmata-messages.ts';
import type { Emit } from './types.ts';

/**
 * Gathers analog messages into readings. StandardFirmata reports its enabled channels one after another, in the order
 * of their pins, once each sampling interval: one such round is one reading, complete when the last channel arrives.
 */
export interface AnalogRounds {
  /**
   * Takes the board's analog mapping, `data[from..to)`: the channel of each pin. Returns the wanted channels that the
   * board does not have; their counts stay NaN.
   */
  map(data: Uint8Array, from: number, to: number): number[];
  /** Wanted pins and their channels that the board has, in the order it samples them. */
  readonly pins: readonly number[];
  readonly channels: readonly number[];
  take(channel: number, value: number, emit: Emit): void;
  /** Forgets the round in progress. */
  reset(): void;
}

export function analogRounds(wanted: readonly number[]): AnalogRounds {
  const reading = { kind: 'reading' as const, counts: new Float64Array(wanted.length), boardUs: Number.NaN };
  /** Place of each channel in the round, and its input; -1 where nobody asked. */
  const rank = new Int16Array(128).fill(-1);
  const input = new Int16Array(128).fill(-1);
  wanted.forEach((channel, index) => (input[channel] = index));
  const pins: number[] = [];
  const channels: number[] = [];
  let last = -1;
  /** A first whole round has come; the ones before it are what the board reports while it is being configured. */
  let settled = false;

  const begin = (): void => {
    last = -1;
    reading.counts.fill(Number.NaN);
  };

  return {
    pins,
    channels,
    map(data, from, to) {
      pins.length = 0;
      channels.length = 0;
      rank.fill(-1);
      for (let at = from; at < to; at++) {
        const channel = data[at] as number;
        if (channel === NO_CHANNEL || (input[channel] as number) < 0) continue;
        rank[channel] = channels.length;
        channels.push(channel);
        pins.push(at - from);
      }
      return wanted.filter((channel) => (rank[channel] as number) < 0);
    },
    take(channel, value, emit) {
      const place = rank[channel] as number;
      if (place < 0) return;
      if (place <= last) {
        // The former round ended without its last channel: it is a reading all the same.
        if (settled) emit(reading);
        begin();
      }
      if (place !== last + 1 && !settled) return begin();
      reading.counts[input[channel] as number] = value;
      last = place;
      if (last < channels.length - 1) return;
      settled = true;
      emit(reading);
      begin();
    },
    reset() {
      settled = false;
      begin();
    },
  };
}
