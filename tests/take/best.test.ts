import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { best, type Demonstration } from '../../src/take/best.ts';
import type { Work } from '../../src/take/derive.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import type { Take } from '../../src/take/reader.ts';
import { fileWriter, headerOf, opened, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();

/** Eight seconds of nodding by minimum-jerk-like cosines, with so much of a tremor, so far off, and a pause of readings. */
async function demonstration(name: string, { tremor = 0, off = 0, pauseS = 0 }): Promise<Take> {
  const writer = fileWriter(folder, name, headerOf(TWO_ARMS));
  const at = (s: number): number =>
    off + 0.4 * (1 - Math.cos((Math.PI * s) / 2)) + tremor * Math.sin(2 * Math.PI * 6 * s);
  for (let i = 0; i <= 800; i++) {
    const s = i / 100;
    if (s > 3 && s < 3 + pauseS) continue;
    writer.row.tUs = i * 10_000;
    writer.row.poseRad.fill(at(s));
    for (const arm of writer.row.followers) {
      arm.commanded = 1;
      arm.state = 3;
      arm.angleRad.fill(at(s));
      arm.speedRadS.fill((at(s + 0.005) - at(s - 0.005)) / 0.01);
    }
    writer.append();
  }
  await writer.end();
  return opened(join(folder, `${name}.arrows`));
}

function outcomeOf<T>(work: Work<T>): T | { readonly code: string } {
  let step = work.next();
  let before = 0;
  for (; step.done !== true; step = work.next()) {
    expect(step.value).toBeGreaterThanOrEqual(before);
    expect(step.value).toBeLessThanOrEqual(1);
    before = step.value;
  }
  return step.value;
}

describe('the best of several demonstrations', () => {
  it('is the smooth one that is like the others; what is wrong with each is told', async () => {
    const takes = [
      await demonstration('shaky', { tremor: 0.02 }),
      await demonstration('good', {}),
      await demonstration('off', { off: 0.3, tremor: 0.004 }),
      await demonstration('paused', { pauseS: 0.2, tremor: 0.004 }),
    ];
    const ordered = outcomeOf(best(takes)) as readonly Demonstration[];
    expect(ordered[0]?.take).toBe('good');
    const of = (name: string): Demonstration => ordered.find(({ take }) => take === name) as Demonstration;
    expect(of('shaky').spectral_arc_length).toBeLessThan(of('good').spectral_arc_length ?? 0);
    expect(of('shaky').log_dimensionless_jerk).toBeLessThan(of('good').log_dimensionless_jerk ?? 0);
    expect(['good', 'off', 'paused', 'shaky'].map((name) => of(name).dropouts)).toEqual([0, 0, 1, 0]);
    // 0.3 rad are 17.2 degrees; laid over in time, half of it is found a moment earlier or later.
    const apart = (name: string): number => of(name).from_others_deg;
    expect(apart('off')).toBeGreaterThan(17.2 / 2);
    for (const name of ['good', 'paused', 'shaky']) expect(apart(name)).toBeLessThan(apart('off') / 2);
    // Five measures of four takes: five places at best, twenty at worst.
    for (const { places } of ordered) expect([places >= 5, places <= 20]).toEqual([true, true]);
    expect(ordered.map(({ places }) => places)).toEqual(ordered.map(({ places }) => places).toSorted((a, b) => a - b));
  });

  it('is asked of two at least', async () => {
    const found = outcomeOf(best([await demonstration('alone', {})]));
    expect(isTakeFault(found) ? found.code : 'ordered').toBe('TAKE_UNFIT');
  });
});
