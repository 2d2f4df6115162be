import { z } from 'zod';
import { textOf } from './quantities.ts';

/** Keys of a line-speaking board; absent ones stand for what most sketches do. */
const lines = z
  .strictObject({
    separator: z
      .string()
      .length(1)
      .describe('the one sign that splits the numbers of a line; absent: any run of comma, semicolon, tab or space')
      .optional(),
    sends: z
      .enum(['always', 'on_change'])
      .default('always')
      .describe('when the board sends: always, or only on_change (then silence is not taken for lost contact)'),
    checksum: z
      .enum(['xor', 'sum'])
      .optional()
      .describe(
        'the checksum after a * at the end of each line received, as two hexadecimal digits: xor or sum; absent: none',
      ),
    template: textOf(
      'the line of one command, such as "{shoulder.us},{elbow.us}\\n" or "S{shoulder.deg:1}\\n"',
    ).optional(),
    limp: textOf('the text that ends the pulses').optional(),
    power_on: textOf('the text that switches the power on').optional(),
    power_off: textOf('the text that switches the power off').optional(),
  })
  .describe('how the lines of this board look');

/** Where a leader or follower is and what is spoken there. */
export const connection = {
  port: textOf(
    'the address of the port, such as serial:/dev/ttyACM0?baud=115200, tcp:host:port, udp:host:port or sim:arm',
  ),
  wire: z
    .union([z.enum(['lines', 'frames', 'firmata']), z.strictObject({ lines })])
    .describe('what is spoken on the port: lines, frames, firmata, or { lines: { ... } } with options'),
  board: textOf('the name of the board; another one that answers is refused. Absent: any board').optional(),
};
