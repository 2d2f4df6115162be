/** What the tests call of packages that ship no types: second opinions on bytes and curves. */

declare module 'cobs' {
  /** `zeroFrame` also puts a zero before and after. */
  export function encode(bytes: Uint8Array, zeroFrame?: boolean): Buffer;
  export function decode(bytes: Uint8Array): Buffer;
}

declare module '@yr/monotone-cubic-spline' {
  type XY = [x: number, y: number];
  const spline: {
    /** Bezier segments: the first point, then `[x1, y1, x2, y2, x, y]`, then shorthand `[x2, y2, x, y]`. */
    points(points: XY[]): number[][];
  };
  export default spline;
}

declare module 'firmata-io' {
  import type { EventEmitter } from 'node:events';

  export class Firmata extends EventEmitter {
    constructor(transport: EventEmitter & { write(bytes: Buffer): void }, options?: object, ready?: () => void);
    readonly isReady: boolean;
    servoConfig(pin: number, minUs: number, maxUs: number): void;
    servoWrite(pin: number, value: number): void;
    analogWrite(pin: number, value: number): void;
    digitalWrite(pin: number, value: number): void;
    pinMode(pin: number, mode: number): void;
    reportAnalogPin(channel: number, on: 0 | 1): void;
    setSamplingInterval(intervalMs: number): void;
  }
}

declare module 'fft.js' {
  export default class FFT {
    /** @param size a power of two */
    constructor(size: number);
    createComplexArray(): number[];
    /** Writes real and imaginary parts in turn, up to half the size. */
    realTransform(out: number[], input: readonly number[]): void;
  }
}

declare module 'fili' {
  export class CalcCascades {
    /** Second-order sections, `order` of them; `a` without its leading 1. */
    lowpass(options: { order: number; characteristic: 'butterworth'; Fs: number; Fc: number }): {
      readonly a: readonly number[];
      readonly b: readonly number[];
      readonly k: number;
    }[];
  }
}

declare module 'ml-regression-theil-sen' {
  /** Median of the slopes between all pairs of points, and of what is then left of y. */
  export class TheilSenRegression {
    constructor(x: readonly number[], y: readonly number[]);
    readonly slope: number;
    readonly intercept: number;
  }
}
