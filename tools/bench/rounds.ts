import { execFile } from 'node:child_process';
import { rmSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { promisify } from 'node:util';
import { type BytesOutcome, median, type Task, type TimeOutcome, type WayName, WAYS } from './task.ts';

/** How much is measured. */
export interface Size {
  readonly followers: readonly number[];
  readonly rounds: number;
  readonly warmUp: number;
  readonly readings: number;
  /** Readings of the run at a true 1 kHz. */
  readonly paced: number;
  readonly pacedRounds: number;
}

export const SIZES: Readonly<Record<'whole' | 'tiny', Size>> = {
  whole: { followers: [1, 4, 16, 64], rounds: 5, warmUp: 3_000, readings: 4_000, paced: 6_000, pacedRounds: 3 },
  tiny: { followers: [2], rounds: 1, warmUp: 200, readings: 200, paced: 50, pacedRounds: 1 },
};

/** Medians over the rounds, of one way with so many followers. */
export interface Row {
  readonly way: WayName;
  readonly followers: number;
  readonly time: TimeOutcome;
  readonly bytes: number;
  /** The same with RxJS's ES2015 build; null for a way without RxJS. */
  readonly bytesEs2015: number | null;
  /** Times of this way over the program's, paired round by round; for `lines`, the script's over these. */
  readonly overProgram: number;
}

export interface Figures {
  readonly size: Size;
  readonly rows: readonly Row[];
  /** The program at a true 1 kHz, with the most followers. */
  readonly paced: TimeOutcome;
  readonly node: string;
}

const ROOT = resolve(import.meta.dirname, '..', '..');
const MIB_YOUNG = 64;
const COUNTED_ROUNDS = 3;
const execute = promisify(execFile);

/** Compiles the bench as the package is compiled, then does every task in a process of its own. */
export async function measure(size: Size, say: (line: string) => void): Promise<Figures> {
  const built = join(ROOT, '.cache', `bench-${process.pid}`);
  try {
    await execute(process.execPath, [
      join(ROOT, 'node_modules', 'typescript', 'bin', 'tsc'),
      ...['--project', join(ROOT, 'tools', 'bench', 'tsconfig.json'), '--outDir', built],
    ]);
    return await everyRound(size, join(built, 'tools', 'bench.js'), say);
  } finally {
    rmSync(built, { recursive: true, force: true });
  }
}

async function everyRound(size: Size, program: string, say: (line: string) => void): Promise<Figures> {
  const times = new Map<string, TimeOutcome[]>();
  const bytes = new Map<string, number[]>();
  const paced: TimeOutcome[] = [];
  for (let round = 0; round < size.rounds; round++) {
    say(`round ${round + 1} of ${size.rounds}`);
    for (const task of tasks(size, round)) {
      const outcome = await inOwnProcess(program, task);
      if ('bytes' in outcome) keep(bytes, task, outcome.bytes);
      else if (task.measure === 'paced') paced.push(outcome);
      else keep(times, task, outcome);
    }
  }
  const rows = size.followers.flatMap((followers) =>
    WAYS.map((way): Row => {
      const key = { way, followers, es2015: false };
      const own = times.get(keyOf(key)) ?? [];
      const program = times.get(keyOf({ ...key, way: 'whole' })) ?? [];
      const ofBytes = (es2015: boolean): number | null => {
        const found = bytes.get(keyOf({ ...key, es2015 }));
        return found === undefined ? null : median(found);
      };
      return {
        way,
        followers,
        time: middle(own),
        bytes: ofBytes(false) ?? Number.NaN,
        bytesEs2015: ofBytes(true),
        overProgram: median(own.map((time, round) => time.medianUs / (program[round]?.medianUs ?? Number.NaN))),
      };
    }),
  );
  return { size, rows, paced: middle(paced), node: process.version };
}

/** One round's tasks: ways side by side, so that what is compared ran within a second or two of one another. */
function tasks(size: Size, round: number): readonly Task[] {
  const { warmUp } = size;
  // The slowest way has no need of so many: it would take half the bench's time.
  const readingsOf = (way: WayName): number => (way === 'stock' ? size.readings / 2 : size.readings);
  // Who goes first changes from round to round.
  const ways = WAYS.map((_, i) => WAYS[(i + round) % WAYS.length] as WayName);
  const timed = size.followers.flatMap((followers) =>
    ways.map((way): Task => ({ way, followers, warmUp, readings: readingsOf(way), measure: 'time', es2015: false })),
  );
  const counted = size.followers.flatMap((followers) =>
    ways.flatMap((way): Task[] => {
      const task: Task = { way, followers, warmUp, readings: readingsOf(way), measure: 'bytes', es2015: false };
      return way === 'whole' || way === 'lines' ? [task, { ...task, es2015: true }] : [task];
    }),
  );
  const most = Math.max(...size.followers);
  const live: Task = { way: 'whole', followers: most, warmUp, readings: size.paced, measure: 'paced', es2015: false };
  return [
    ...timed,
    // Garbage hardly differs from process to process; what the compiler made of the program may.
    ...counted.filter(({ way }) => round === 0 || (round < COUNTED_ROUNDS && way === 'whole')),
    ...(round < size.pacedRounds ? [live] : []),
  ];
}

async function inOwnProcess(program: string, task: Task): Promise<TimeOutcome | BytesOutcome> {
  const young = [`--min-semi-space-size=${MIB_YOUNG}`, `--max-semi-space-size=${MIB_YOUNG}`];
  const flags = task.measure === 'bytes' ? ['--expose-gc', ...young] : [];
  const { stdout } = await execute(process.execPath, [...flags, program, '--task', JSON.stringify(task)]);
  return JSON.parse(stdout) as TimeOutcome | BytesOutcome;
}

function keyOf(task: Pick<Task, 'way' | 'followers' | 'es2015'>): string {
  return `${task.way} ${task.followers} ${task.es2015}`;
}

function keep<T>(kept: Map<string, T[]>, task: Task, outcome: T): void {
  const key = keyOf(task);
  kept.set(key, [...(kept.get(key) ?? []), outcome]);
}

/** The median of every figure; the worst of the worst. */
function middle(outcomes: readonly TimeOutcome[]): TimeOutcome {
  const of = (pick: (outcome: TimeOutcome) => number): number => median(outcomes.map(pick));
  return {
    medianUs: of((o) => o.medianUs),
    p99Us: of((o) => o.p99Us),
    worstUs: Math.max(...outcomes.map((o) => o.worstUs)),
    gc: {
      pauses: of((o) => o.gc.pauses),
      longestUs: Math.max(...outcomes.map((o) => o.gc.longestUs)),
      shareOfTime: of((o) => o.gc.shareOfTime),
    },
    commands: of((o) => o.commands),
  };
}
