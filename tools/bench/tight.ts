import { cobsDecode } from '../../src/wire/cobs.ts';
import { crc16 } from '../../src/wire/crc16.ts';
import { FRAME_BYTES_MAX, READINGS_HEAD, u16 } from '../../src/wire/frames-layout.ts';
import { JOINTS, type Scene, START_US } from './scene.ts';
import { tightFollowers } from './tight-followers.ts';
import { tightLeader } from './tight-leader.ts';
import type { Way } from './way.ts';

const CRC_BYTES = 2;

/**
 * (b) The yardstick: the same sums by hand over flat typed arrays, no streams, no objects. As general as the program
 * where that costs sums (weighted sources and turns, moving targets, maps through any points, every reason that is
 * shown), and no more than this scene needs elsewhere (whole readings, no keys, ports that never vanish). Its commands
 * equal (a)'s byte for byte.
 */
export function tight(scene: Scene): Way {
  const lead = tightLeader(scene.plan.leader);
  const arms = tightFollowers(scene.plan, lead);
  const stuffed = new Uint8Array(FRAME_BYTES_MAX);
  const payload = new Uint8Array(FRAME_BYTES_MAX);
  const counts = new Float64Array(JOINTS);
  const now = arms.nowUs;
  now[0] = START_US;
  let filled = 0;

  const tickBefore = (endUs: Float64Array, further: number): void => {
    for (;;) {
      const dueUs = Math.min(arms.dueUs[0] as number, lead.dueUs[0] as number);
      if (!(dueUs < (endUs[0] as number) + further)) return;
      now[0] = dueUs;
      lead.watch(now);
      arms.step(false);
    }
  };

  const frame = (nowUs: Float64Array): void => {
    const length = cobsDecode(stuffed, filled, payload) - CRC_BYTES;
    filled = 0;
    if (length !== READINGS_HEAD + 2 * JOINTS || crc16(payload, 0, length) !== u16(payload, length)) return;
    for (let j = 0; j < JOINTS; j++) counts[j] = u16(payload, READINGS_HEAD + 2 * j);
    tickBefore(nowUs, 0);
    now[0] = nowUs[0] as number;
    lead.take(now, counts);
    arms.step(true);
    tickBefore(nowUs, 1);
  };

  return {
    push(chunk, nowUs) {
      for (let at = 0; at < chunk.length; at++) {
        const byte = chunk[at] as number;
        if (byte !== 0) stuffed[filled++] = byte;
        else if (filled > 0) frame(nowUs);
      }
    },
    sent: arms.sent,
    commands: arms.commands,
  };
}
