import { trace } from '../bridge/trace.ts';
import { US_PER_MS } from '../clock/clock.ts';
import type { CompiledRig } from '../rig/compiled.ts';

/** Enough for the engine to have compiled what runs for every reading. */
const READINGS = 600;
const INTERVAL_US = 5 * US_PER_MS;
/** Readings of one way of every joint through its travel. */
const STROKE = 100;

/**
 * Runs made-up readings through a rig's whole way and throws the commands away, before anything is opened. The first
 * readings of a fresh process cost several times as much as later ones, and that must not be while an arm moves.
 * @returns how many commands were thrown away
 */
export function warm(rig: CompiledRig): number {
  let commands = 0;
  const { leader } = rig.plan;
  const counts = new Float64Array(rig.boards.find(({ leads }) => leads)?.plan.inputs?.channels.length ?? 0);
  const run = trace(rig, [], 0, () => commands++);
  for (const button of leader.buttons) {
    const isDown = button.does === 'enable';
    counts[button.input] = isDown === (button.pressed === 'below') ? leader.countsMin : leader.countsMax;
  }
  for (let i = 0; i < READINGS; i++) {
    const phase = (i % (2 * STROKE)) / STROKE;
    const share = phase <= 1 ? phase : 2 - phase;
    for (const { input, travelMin, travelMax } of leader.joints)
      counts[input] = travelMin + share * (travelMax - travelMin);
    run.push({ kind: 'reading', tUs: i * INTERVAL_US, counts });
  }
  run.end();
  return commands;
}
