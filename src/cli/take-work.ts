import { US_PER_MS } from '../clock/clock.ts';
import { isTakeFault, type TakeFault, takeSentence } from '../take/fault.ts';
import type { TakeWorld } from './take-world.ts';

/** How long work goes on before the program looks up: for a signal, and to show how far it is. */
const TURN_US = 40 * US_PER_MS;
/** Work that is over sooner shows no bar. */
const QUIET_US = 500 * US_PER_MS;
const BAR = 30;

export type Outcome<T> = { readonly done: T } | { readonly status: number };

/**
 * Does long work in turns, shows how far it is, and gives it up when asked to: the work then cleans up after itself. What
 * went wrong has been said when it comes back as a status.
 */
export async function worked<T>(work: Generator<number, T | TakeFault>, world: TakeWorld): Promise<Outcome<T>> {
  const { clock, err, watched } = world;
  let interrupted = false;
  const cancel = world.onInterrupt(() => {
    interrupted = true;
  });
  const startUs = clock.nowUs();
  let shown = false;
  const clear = (): void => {
    if (shown) err.write('\r\x1b[K');
    shown = false;
  };
  try {
    for (;;) {
      const turnUs = clock.nowUs();
      let step = work.next();
      while (step.done !== true && clock.nowUs() - turnUs < TURN_US) step = work.next();
      if (step.done === true) {
        clear();
        return outcome(step.value, err);
      }
      await new Promise<void>((resume) => void clock.at(clock.nowUs(), resume));
      if (interrupted) {
        clear();
        return { status: 130 };
      }
      if (!watched || clock.nowUs() - startUs < QUIET_US) continue;
      err.write(`\r${bar(step.value)}`);
      shown = true;
    }
  } finally {
    // Whatever is half written is thrown away.
    work.return(undefined as never);
    cancel();
  }
}

function outcome<T>(value: T | TakeFault, err: TakeWorld['err']): Outcome<T> {
  if (typeof value !== 'object' || value === null || !isTakeFault(value)) return { done: value as T };
  err.write(`error: ${takeSentence(value)}\n`);
  return { status: isOurs(value) ? 2 : 1 };
}

/** The disk fails; everything else is what was asked for. */
function isOurs({ code }: TakeFault): boolean {
  return code !== 'TAKE_DISK' && code !== 'TAKE_DISK_FULL' && code !== 'TAKE_DISK_SLOW';
}

export function refusedStatus(fault: TakeFault, err: TakeWorld['err']): number {
  err.write(`error: ${takeSentence(fault)}\n`);
  return isOurs(fault) ? 2 : 1;
}

function bar(share: number): string {
  const full = Math.round(BAR * share);
  return `[${'='.repeat(full)}${' '.repeat(BAR - full)}] ${Math.round(100 * share)} %`;
}
