import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { describe, expect, it } from 'vitest';
import { openSession } from '../../src/wire/session.ts';
import { FIXTURES, PLAN, join } from './boards.ts';
import { connected, frameOf } from './told.ts';

setFlagsFromString('--expose-gc');
const collect = runInNewContext('gc') as () => void;

const RUNS = 10_000;
const ROUNDS = 8;
/** A number boxed once a run would be 12 bytes or more; what the compiler leaves behind is far below one. */
const BYTES_PER_RUN_MAX = 1;

/** Least heap growth of a run over a few rounds: the first ones still compile. */
function bytesPerRun(run: () => void): number {
  let least = Number.POSITIVE_INFINITY;
  for (let round = 0; round < ROUNDS; round++) {
    collect();
    const before = process.memoryUsage().heapUsed;
    for (let index = 0; index < RUNS; index++) run();
    const grown = process.memoryUsage().heapUsed - before;
    // A collection in its midst says nothing about a round.
    if (grown >= 0) least = Math.min(least, grown / RUNS);
  }
  return least;
}

describe('memory', () => {
  it('would be seen if a run took one boxed number', () => {
    let boxed = 0.5;
    const bytes = bytesPerRun(() => {
      boxed += 0.25;
    });
    expect(boxed).toBeGreaterThan(1);
    expect(bytes).toBeGreaterThan(BYTES_PER_RUN_MAX);
  });

  for (const [name, { choice, board }] of Object.entries(FIXTURES)) {
    it(`is not taken for a reading on ${name}`, () => {
      const session = openSession(choice, PLAN);
      const speaker = board();
      connected(session, speaker);
      // Each once: board time and sequence numbers have to go on.
      const chunks = Array.from({ length: ROUNDS * RUNS }, (_, index) => speaker.reading([512, index % 1_024, 9]));
      let pushed = 0;
      let readings = 0;
      let others = 0;
      const emit = ({ kind }: { kind: string }): void => {
        if (kind === 'reading') readings++;
        else others++;
      };
      const bytes = bytesPerRun(() => session.push(chunks[pushed++] as Uint8Array, emit));
      console.log(`${name}: ${bytes.toFixed(3)} bytes a reading`);
      expect({ readings, others }).toEqual({ readings: ROUNDS * RUNS, others: 0 });
      expect(bytes).toBeLessThan(BYTES_PER_RUN_MAX);
    });

    it(`is not taken for a command on ${name}`, () => {
      const session = openSession(choice, PLAN);
      connected(session, board());
      const frame = frameOf([1_500.3, 901.7, 1_999.9], [10, -20, 30]);
      const out = new Uint8Array(session.frameBytesMax(0));
      let length = 0;
      const bytes = bytesPerRun(() => {
        frame.pulsesUs[0] = 600 + ((length * 7 + (frame.pulsesUs[0] as number)) % 1_800);
        length = session.encode(0, frame, out);
      });
      console.log(`${name}: ${bytes.toFixed(3)} bytes a command`);
      expect(length).toBeGreaterThan(0);
      expect(bytes).toBeLessThan(BYTES_PER_RUN_MAX);
    });
  }

  it('is not taken for a chunk of many readings', () => {
    const { choice, board } = FIXTURES.lines;
    const session = openSession(choice, PLAN);
    const speaker = board();
    connected(session, speaker);
    const chunk = join(...[1, 2, 3, 4].map((count) => speaker.reading([count, count, count])));
    let readings = 0;
    const emit = ({ kind }: { kind: string }): void => {
      if (kind === 'reading') readings++;
    };
    const bytes = bytesPerRun(() => session.push(chunk, emit));
    expect(readings).toBe(4 * ROUNDS * RUNS);
    expect(bytes).toBeLessThan(BYTES_PER_RUN_MAX);
  });
});
