import { US_PER_MS } from '../clock/clock.ts';
import type { LinesOptions } from '../wire/lines-options.ts';
import type { BoardPlan } from '../wire/types.ts';
import type { Firmware, Pins } from './firmware.ts';
import { linesReader } from './lines-reader.ts';
import type { ArmOptions } from './servo-arm.ts';

/**
 * A hobby sketch: prints its inputs as a line of numbers, and obeys lines that look like its followers' templates.
 * It says who it is when it has a name, and otherwise nothing, like most.
 */
const SAMPLING_US = 5 * US_PER_MS;

export function linesBoard(
  name: string | null,
  options: LinesOptions,
  plan: BoardPlan,
  arms: readonly ArmOptions[],
  pins: Pins,
): Firmware {
  return {
    start() {
      if (name !== null) pins.send(new TextEncoder().encode(`board: ${name}\r\n`));
    },
    receive: linesReader(options, plan, arms, pins),
    sample: linesPrinter(options, plan, pins),
    samplingUs: SAMPLING_US,
  };
}

function linesPrinter(options: LinesOptions, plan: BoardPlan, pins: Pins): () => void {
  const channels = plan.inputs?.channels ?? [];
  // A sketch prints a column for each of its channels, wired or not; a channel without a wire reads zero here.
  const columns: number[] = Array.from({ length: Math.max(-1, ...channels) + 1 }, () => 0);
  const separator = options.separator ?? ',';
  let printed = '';

  return () => {
    const counts = pins.read();
    for (let input = 0; input < channels.length; input++) columns[channels[input] as number] = counts[input] as number;
    const numbers = columns.join(separator);
    if (options.sends === 'on_change' && numbers === printed) return;
    printed = numbers;
    if (pins.loses()) return;
    pins.send(new TextEncoder().encode(`${numbers}${checksum(numbers, options.checksum)}\r\n`));
  };
}

function checksum(line: string, kind: LinesOptions['checksum']): string {
  if (kind === null) return '';
  const bytes = new TextEncoder().encode(line);
  const value = bytes.reduce((sum, byte) => (kind === 'xor' ? sum ^ byte : (sum + byte) & 0xff), 0);
  return `*${value.toString(16).toUpperCase().padStart(2, '0')}`;
}
