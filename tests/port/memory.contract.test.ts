import { virtualClock } from '../../src/clock/virtual.ts';
import { type MemoryPortOptions, memoryPort } from '../../src/port/memory.ts';
import { type Bench, portContract } from './contract.ts';

const STEP_US = 1_000;
const STEPS_MAX = 60_000;

async function memoryBench(options: MemoryPortOptions): Promise<Bench> {
  const clock = virtualClock(5_000_000);
  const { port, far } = memoryPort(clock, 'sim:arm', options);
  const received: number[] = [];
  far.listen({ data: (bytes) => received.push(...bytes) });
  const run = async (us: number): Promise<void> => {
    clock.runTo(clock.nowUs() + us);
    await Promise.resolve();
  };
  return {
    port,
    received: () => Buffer.from(received),
    send: (bytes) => void far.write(bytes),
    vanish: async () => far.unplug(),
    comeBack: async () => far.replug(),
    async until(what, condition) {
      for (let step = 0; step < STEPS_MAX && !condition(); step++) await run(STEP_US);
      if (!condition()) throw new Error(`waited in vain for: ${what}`);
    },
    settle: () => run(20_000_000),
    dispose: async () => {},
    held: () => (clock.nextUs() === Number.POSITIVE_INFINITY ? 0 : 1),
  };
}

const asMissing = {
  lossCode: 'PORT_CLOSED',
  absenceCode: 'PORT_MISSING',
  noticesByWriting: false,
  missing: null,
} as const;
portContract({ name: 'memory', make: () => memoryBench({}), ...asMissing });
portContract({ name: 'memory (115200 baud)', make: () => memoryBench({ baud: 115_200 }), ...asMissing });
portContract({
  name: 'memory (57600 baud, USB packets, slow to open)',
  make: () => memoryBench({ baud: 57_600, chunkBytes: 64, openMs: 1_900 }),
  ...asMissing,
});
