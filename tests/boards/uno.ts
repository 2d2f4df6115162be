/**
 * An Arduino Uno (ATmega328P, 16 MHz) running real firmware in lockstep with a virtual clock.
 *
 * A slice of instructions runs ahead of the clock at each wake-up. A byte from the host needs longer than a slice to
 * come down the line, so it always arrives at its exact cycle; everything the board does is stamped with the cycle it
 * happened in. One microsecond is sixteen cycles, always. Not modelled: the boot loader (on a real Uno it adds its own
 * wait after a reset) and the USB bridge's packets.
 */
import {
  ADCMuxInputType,
  AVRADC,
  AVRIOPort,
  AVRTimer,
  AVRUSART,
  CPU,
  adcConfig,
  avrInstruction,
  portBConfig,
  portCConfig,
  portDConfig,
  timer0Config,
  timer1Config,
  timer2Config,
  usart0Config,
} from 'avr8js';
import type { Cancel } from '../../src/clock/clock.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import { pinRecorder } from './pins.ts';
import type { Pins } from './pins.ts';

/** A pot's wiper: volts, 0 to 5, at a virtual instant in microseconds. */
export type Volts = (atUs: number) => number;

export interface UnoBoard extends Pins {
  /** Bytes from the host; they go down the line at the baud rate, after those still on it. */
  receive(bytes: Uint8Array): void;
  /** What analog input A0..A5 sees from now on; 0 V until set. */
  setVolts(channel: number, volts: Volts | number): void;
  /** Starts it anew within one slice, as opening its port does (DTR): the pins let go, bytes under way to it are lost. Also powers it on. */
  reset(): void;
  powerOff(): void;
  readonly powered: boolean;
}

export interface UnoOptions {
  readonly clock: VirtualClock;
  /** The firmware's flash image. */
  readonly flash: Uint16Array;
  /** Takes each byte the board has sent, at the microsecond its stop bit ends. The array is reused. */
  readonly send: (bytes: Uint8Array) => void;
  readonly baud?: number;
}

const CPU_HZ = 16_000_000;
const CYCLES_PER_US = 16;
/** 8N1: start bit, eight data bits, stop bit. */
const BITS_PER_BYTE = 10;
const BAUD_DEFAULT = 57_600;
/** Shorter than a byte on the line (173.6 us at 57600 baud): see the head of this file. */
const SLICE_US = 160;
/** Data memory above the registers' 256 addresses (ATmega328P datasheet, "SRAM Data Memory"). */
const SRAM_BYTES = 2_048;
const ADC_COUNTS = 1_024;
const VREF = 5;
/** Sample and hold happens 1.5 ADC clocks after the start (ATmega328P datasheet, "ADC Conversion Time"). */
const HOLD_ADC_CLOCKS = 1.5;
/** More than an operating system would hold for a serial port in these tests. */
const LINE_BYTES_MAX = 16_384;

/** Arduino's numbering of the ports (Arduino Uno pinout): D is 0..7, B is 8..13, C is 14..19. */
const PORTS = [
  { config: portDConfig, firstPin: 0, pins: 8 },
  { config: portBConfig, firstPin: 8, pins: 6 },
  { config: portCConfig, firstPin: 14, pins: 6 },
] as const;

export function unoBoard(options: UnoOptions): UnoBoard {
  const { clock, flash, send } = options;
  const byteUs = (BITS_PER_BYTE * 1e6) / (options.baud ?? BAUD_DEFAULT);
  if (byteUs <= SLICE_US) throw new Error(`a byte must take longer than a slice of ${SLICE_US} us`);
  const pins = pinRecorder();
  const volts: Volts[] = Array.from({ length: 6 }, () => () => 0);
  const sent = new Uint8Array(1);

  let chip: Chip | null = null;
  let lineFreeUs = 0;
  let cancelSlice: Cancel = () => {};

  const slice = (): void => {
    const nowUs = clock.nowUs();
    chip?.runTo(nowUs + SLICE_US);
    cancelSlice = clock.at(nowUs + SLICE_US, slice);
  };

  /** Takes hold at the end of the slice that has already run; returns that instant. */
  const stopped = (): number => {
    const atUs = Math.max(clock.nowUs(), chip?.ranToUs() ?? 0);
    cancelSlice();
    chip = null;
    lineFreeUs = 0;
    pins.letGo(atUs);
    return atUs;
  };

  return {
    level: pins.level,
    changes: pins.changes,
    pulses: pins.pulses,
    get powered() {
      return chip !== null;
    },
    receive(bytes) {
      if (chip === null) return;
      for (const byte of bytes) {
        lineFreeUs = Math.max(lineFreeUs, clock.nowUs()) + byteUs;
        chip.receiveAt(lineFreeUs, byte);
      }
      if (lineFreeUs - clock.nowUs() > LINE_BYTES_MAX * byteUs) throw new Error('the host writes faster than the line');
    },
    setVolts(channel, value) {
      volts[channel] = typeof value === 'number' ? () => value : value;
    },
    reset() {
      const startUs = Math.ceil(stopped());
      const sentAt = (atUs: number, byte: number): void => {
        clock.at(Math.ceil(atUs), () => {
          sent[0] = byte;
          send(sent);
        });
      };
      chip = bootedChip({ flash, startUs, volts, sentAt, wrote: pins.wrote });
      slice();
    },
    powerOff() {
      stopped();
    },
  };
}

interface Chip {
  ranToUs(): number;
  runTo(untilUs: number): void;
  /** A byte whose stop bit ends at `atUs`. */
  receiveAt(atUs: number, byte: number): void;
}

interface ChipWiring {
  readonly flash: Uint16Array;
  readonly startUs: number;
  readonly volts: readonly Volts[];
  readonly sentAt: (atUs: number, byte: number) => void;
  readonly wrote: (firstPin: number, pins: number, value: number, outputs: number, atUs: number) => void;
}

function bootedChip(wiring: ChipWiring): Chip {
  const cpu = new CPU(wiring.flash, SRAM_BYTES);
  const usOf = (cycles: number): number => wiring.startUs + cycles / CYCLES_PER_US;
  const cyclesOf = (us: number): number => Math.round((us - wiring.startUs) * CYCLES_PER_US);

  for (const { config, firstPin, pins } of PORTS) {
    new AVRIOPort(cpu, config).addListener((value) =>
      wiring.wrote(firstPin, pins, value, cpu.data[config.DDR] as number, usOf(cpu.cycles)),
    );
  }
  for (const config of [timer0Config, timer1Config, timer2Config]) new AVRTimer(cpu, config);

  const usart = new AVRUSART(cpu, usart0Config, CPU_HZ);
  usart.onByteTransmit = (byte) => wiring.sentAt(usOf(cpu.cycles + (BITS_PER_BYTE * CPU_HZ) / usart.baudRate), byte);

  const adc = new AVRADC(cpu, adcConfig);
  adc.onADCRead = (input) => {
    const volts = input.type === ADCMuxInputType.SingleEnded ? wiring.volts[input.channel] : undefined;
    const heldUs = usOf(cpu.cycles + HOLD_ADC_CLOCKS * adc.prescaler);
    // ADC = Vin * 1024 / Vref (ATmega328P datasheet, "ADC Conversion Result").
    const counts = Math.floor(((volts?.(heldUs) ?? 0) * ADC_COUNTS) / VREF);
    cpu.addClockEvent(() => adc.completeADCRead(Math.min(Math.max(counts, 0), ADC_COUNTS - 1)), adc.sampleCycles);
  };

  return {
    ranToUs: () => usOf(cpu.cycles),
    runTo(untilUs) {
      const end = cyclesOf(untilUs);
      while (cpu.cycles < end) {
        avrInstruction(cpu);
        cpu.tick();
      }
    },
    receiveAt(atUs, byte) {
      // A disabled receiver hears nothing, as on the chip: writeByte says false and the byte is gone.
      cpu.addClockEvent(() => usart.writeByte(byte, true), cyclesOf(atUs) - cpu.cycles);
    },
  };
}
