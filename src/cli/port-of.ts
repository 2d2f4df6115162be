import { simulatedFor } from '../bridge/simulated.ts';
import type { Clock } from '../clock/clock.ts';
import { openPort } from '../port/open.ts';
import type { Port } from '../port/types.ts';
import type { CompiledBoard, CompiledRig } from '../rig/compiled.ts';
import { WIRE_ABILITIES } from '../wire/abilities.ts';

/** The port of a board: a real one, or that of a board simulated in this program. */
export function portOf(rig: CompiledRig, board: CompiledBoard, clock: Clock): Port {
  if (board.address.kind === 'sim') return simulatedFor(rig, board, clock).port;
  return openPort(board.address, clock, WIRE_ABILITIES[board.wire.name].baudDefault);
}
