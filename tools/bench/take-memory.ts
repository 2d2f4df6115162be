import { execFile } from 'node:child_process';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { player } from '../../src/take/player.ts';
import { reel } from '../../src/take/reel.ts';
import { summarize } from '../../src/take/summary.ts';
import { exported, whole } from './take-rates.ts';
import { INTERVAL_US, opened, scenery } from './take-scene.ts';
import { JOINTS } from './scene.ts';

/** What a process that did one thing with a take, and nothing else, had in memory at most. */
export interface TakeMemory {
  readonly what: keyof typeof JOBS;
  /** Of the shorter take, and of the longer one. */
  readonly peakMegabytes: readonly [number, number];
}

/** Readings between two turns of the loop, in which the disk is heard. */
const TURN = 100;

/** Each does its work on the take in the file, or over as many readings as that has. */
const JOBS = {
  record: async (file: string): Promise<void> => {
    const rows = rowsOf(file);
    const { read, recorder, settled } = scenery(`${file}.recorded`);
    for (let k = 0; k < rows; k++) {
      read(k);
      if (k % TURN === 0) await settled();
    }
    await recorder?.end();
  },
  show: (file: string): void => whole(file, (take) => summarize(take)),
  play: (file: string): void => {
    const take = opened(file);
    const { drive, clock, push, read } = scenery(null);
    const joints = Array.from({ length: JOINTS }, (_, j) => j);
    const cast = { leader: joints, followers: drive.followers.map(({ index }) => ({ follower: index, joints })) };
    read(0);
    const rows = reel(take, { fromUs: 0, toUs: take.durationUs, speed: 1, loopBlendS: null });
    const options = { cast, by: 'leader', posed: new Uint8Array(JOINTS).fill(1), countInUs: 0 } as const;
    const playing = player({ drive, push }, clock, rows, { ...options, changed: () => {} });
    while (playing.is.phase !== 'over') clock.runTo(clock.nowUs() + TURN * INTERVAL_US);
    take.close();
  },
  export: (file: string): void => exported(file, 'csv'),
} as const satisfies Record<string, (file: string) => void | Promise<void>>;

function rowsOf(file: string): number {
  const take = opened(file);
  take.close();
  return take.rows;
}

/** @param files a short and a long take for each job */
export async function memories(
  files: Readonly<Record<keyof typeof JOBS, readonly [string, string]>>,
): Promise<readonly TakeMemory[]> {
  const all: TakeMemory[] = [];
  for (const what of Object.keys(JOBS) as (keyof typeof JOBS)[]) {
    const [short, long] = files[what];
    all.push({ what, peakMegabytes: [await peakOf(what, short), await peakOf(what, long)] });
  }
  return all;
}

async function peakOf(what: keyof typeof JOBS, file: string): Promise<number> {
  const self = join(import.meta.dirname, 'take-memory.ts');
  const { stdout } = await promisify(execFile)(process.execPath, ['--import', 'tsx', self, what, file], {
    cwd: import.meta.dirname,
  });
  return Number(stdout);
}

if (process.argv[1] === import.meta.filename) {
  const [, , what = '', file = ''] = process.argv;
  await JOBS[what as keyof typeof JOBS](file);
  // Kibibytes, as getrusage(2) has them.
  console.log((process.resourceUsage().maxRSS * 1024) / 1e6);
}
