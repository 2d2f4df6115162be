import type { Plan } from '../../src/drive/plan.ts';
import { PULSE_STEPS_PER_US } from '../../src/wire/frames-layout.ts';
import { JOINTS, servoPoints } from './scene.ts';

/** Angles to pulses on the wire's grid, over rows of flat tables. */
export interface TightServos {
  readonly steps: Uint16Array;
  /** Turns servos `first` to `end - 1` to where the joints are. */
  turn(first: number, end: number): void;
}

/** A row of the maps: start, then c0 to c3. */
const ROW = 5;

export function tightServos(plan: Plan, x: Float64Array): TightServos {
  const servos = plan.followers.flatMap((spec) => spec.servos);
  const turns = servos.map((servo, k) =>
    servo.turns.map((t) => ({ ...t, joint: t.joint + JOINTS * Math.floor(k / JOINTS) })),
  );
  const first = Uint16Array.from(servos.keys(), (k) => turns.slice(0, k).flat().length);
  const end = Uint16Array.from(turns, (t, k) => (first[k] as number) + t.length);
  const from = Uint16Array.from(turns.flat(), (t) => t.joint);
  const weight = Float64Array.from(turns.flat(), (t) => t.weight);
  const tables = servos.map((_, k) => rows(servoPoints(k % JOINTS)));
  const rowsFrom = Uint32Array.from(servos.keys(), (k) => tables.slice(0, k).flat().length);
  const rowsLast = Uint32Array.from(tables, (table, k) => (rowsFrom[k] as number) + table.length - ROW);
  const map = Float64Array.from(tables.flat());
  const low = Int32Array.from(servos, (servo) => Math.ceil(servo.map.yMin * PULSE_STEPS_PER_US - 1e-6));
  const high = Int32Array.from(servos, (servo) => Math.floor(servo.map.yMax * PULSE_STEPS_PER_US + 1e-6));
  const pulsesUs = new Float64Array(servos.length);
  const sentUs = new Float64Array(servos.length);
  const steps = new Uint16Array(servos.length);

  const turn = (firstServo: number, endServo: number): void => {
    for (let k = firstServo; k < endServo; k++) {
      let sum = 0;
      for (let i = first[k] as number; i < (end[k] as number); i++)
        sum += (weight[i] as number) * (x[from[i] as number] as number);
      let row = rowsFrom[k] as number;
      while (row < (rowsLast[k] as number) && (map[row + ROW] as number) <= sum) row += ROW;
      const d = sum - (map[row] as number);
      const pulse =
        (map[row + 1] as number) +
        d * ((map[row + 2] as number) + d * ((map[row + 3] as number) + d * (map[row + 4] as number)));
      pulsesUs[k] = pulse;
      if (Number.isNaN(pulse)) throw new RangeError('pulse is not a number');
      const rounded = (pulse * PULSE_STEPS_PER_US + 0.5) | 0;
      const lowest = low[k] as number;
      const highest = high[k] as number;
      const step = rounded < lowest ? lowest : rounded > highest ? highest : rounded;
      sentUs[k] = step / PULSE_STEPS_PER_US;
      steps[k] = step;
    }
  };
  return { steps, turn };
}

/** Straight between the points and level beyond them. */
function rows(points: readonly (readonly [number, number])[]): readonly number[] {
  const [x0, y0] = points[0] as readonly [number, number];
  const table = [x0, y0, 0, 0, 0];
  points.forEach(([x, y], i) => {
    const [nextX, nextY] = points[i + 1] ?? [x + 1, y];
    table.push(x, y, (nextY - y) / (nextX - x), 0, 0);
  });
  return table;
}
