/** An ATmega328P at 16 MHz with the periphery of an Arduino Uno: ports, timers, USART, converter. Knows no clock: it is told how far to run. */
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

/** A pot's wiper: volts, 0 to 5, at an instant in microseconds. */
export type Volts = (atUs: number) => number;

export interface ChipWiring {
  readonly flash: Uint16Array;
  /** The instant of its reset; every other instant counts from it. */
  readonly startUs: number;
  /** How fast its clock runs: 1 is exactly sixteen cycles a microsecond. */
  readonly pace: number;
  /** Of analog inputs A0 to A5; read anew at each conversion. */
  readonly volts: readonly Volts[];
  /** A byte has been given to the USART; its stop bit ends at `endsUs`, which is yet to come. */
  readonly sending: (byte: number, endsUs: number) => void;
  /** Eight (or six) pins from `firstPin` up have been written: their levels, and which of them are outputs. */
  readonly wrote: (firstPin: number, pins: number, levels: number, outputs: number, atUs: number) => void;
}

export interface Chip {
  /** Executes whole instructions until `untilUs` is reached. */
  runTo(untilUs: number): void;
  /** The stop bit of a byte on its receiving pin ends at `atUs`, which is yet to come. */
  receiveAt(atUs: number, byte: number): void;
}

const CPU_HZ = 16_000_000;
const CYCLES_PER_US = 16;
/** 8N1: start bit, eight data bits, stop bit. */
export const BITS_PER_BYTE = 10;
/** Data memory above the registers' 256 addresses (ATmega328P datasheet, "SRAM Data Memory"). */
const SRAM_BYTES = 2_048;
const ADC_COUNTS = 1_024;
const VREF = 5;
/** Sample and hold happens 1.5 ADC clocks after the start (ATmega328P datasheet, "ADC Conversion Time"). */
const HOLD_ADC_CLOCKS = 1.5;
/** Bit 7 of UCSR0A, bit 4 of UCSR0B (ATmega328P datasheet, "USART Register Description"). */
const RECEIVE_COMPLETE = 0x80;
const RECEIVER_ENABLED = 0x10;

/** Arduino's numbering of the ports (Arduino Uno pinout): D is 0..7, B is 8..13, C is 14..19. */
const PORTS = [
  { config: portDConfig, firstPin: 0, pins: 8 },
  { config: portBConfig, firstPin: 8, pins: 6 },
  { config: portCConfig, firstPin: 14, pins: 6 },
] as const;

export function bootedChip(wiring: ChipWiring): Chip {
  const cpu = new CPU(wiring.flash, SRAM_BYTES);
  const cyclesPerUs = CYCLES_PER_US * wiring.pace;
  const usOf = (cycles: number): number => wiring.startUs + cycles / cyclesPerUs;
  const cyclesOf = (us: number): number => Math.round((us - wiring.startUs) * cyclesPerUs);

  for (const { config, firstPin, pins } of PORTS) {
    new AVRIOPort(cpu, config).addListener((levels) =>
      wiring.wrote(firstPin, pins, levels, cpu.data[config.DDR] as number, usOf(cpu.cycles)),
    );
  }
  for (const config of [timer0Config, timer1Config, timer2Config]) new AVRTimer(cpu, config);

  const usart = new AVRUSART(cpu, usart0Config, CPU_HZ);
  keepReceivedByte(cpu);
  usart.onByteTransmit = (byte) => {
    wiring.sending(byte, usOf(cpu.cycles + (BITS_PER_BYTE * CPU_HZ) / usart.baudRate));
  };

  const adc = new AVRADC(cpu, adcConfig);
  adc.onADCRead = (input) => {
    const volts = input.type === ADCMuxInputType.SingleEnded ? wiring.volts[input.channel] : undefined;
    const heldUs = usOf(cpu.cycles + HOLD_ADC_CLOCKS * adc.prescaler);
    // ADC = Vin * 1024 / Vref (ATmega328P datasheet, "ADC Conversion Result").
    const counts = Math.floor(((volts?.(heldUs) ?? 0) * ADC_COUNTS) / VREF);
    cpu.addClockEvent(() => adc.completeADCRead(Math.min(Math.max(counts, 0), ADC_COUNTS - 1)), adc.sampleCycles);
  };

  return {
    runTo(untilUs) {
      const end = cyclesOf(untilUs);
      while (cpu.cycles < end) {
        avrInstruction(cpu);
        cpu.tick();
      }
    },
    receiveAt(atUs, byte) {
      cpu.addClockEvent(() => {
        // The chip would hold a second byte; the emulator holds one, and no interrupt of this firmware takes so long.
        if (((cpu.data[usart0Config.UCSRA] as number) & RECEIVE_COMPLETE) !== 0) throw new Error('receive overrun');
        // A disabled receiver hears nothing, as on the chip: writeByte says false and the byte is gone.
        usart.writeByte(byte, true);
      }, cyclesOf(atUs) - cpu.cycles);
    },
  };
}

/**
 * avr8js 0.21 forgets a received byte when UCSRB is written before the byte is read, which happens whenever the firmware
 * starts or ends sending at that moment. The chip forgets it only when its receiver is disabled. The forgetting depends
 * on the receiver having been enabled before, so that is what the emulator is not told.
 */
function keepReceivedByte(cpu: CPU): void {
  const write = cpu.writeHooks[usart0Config.UCSRB];
  if (write === undefined) throw new Error('the emulated USART listens to no UCSRB');
  cpu.writeHooks[usart0Config.UCSRB] = (value, oldValue, address, mask) =>
    write(value, oldValue & ~RECEIVER_ENABLED, address, mask);
}
