import { mkdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs';
import { homedir } from 'node:os';
import { dirname, join } from 'node:path';
import { createHash } from 'node:crypto';
import { type Clock, US_PER_S } from '../clock/clock.ts';
import type { Drive } from '../drive/drive.ts';
import type { FollowerSpec } from '../follower/spec.ts';

/**
 * What each arm was last told, kept between runs: a hobby servo tells nothing, and runs to its first pulse at full speed,
 * so the first pulse should say where the arm most likely is.
 */
export interface WakeMemory {
  /** The pose to wake a follower at, radians in joint order; null: nothing is known, or it was left parked. */
  recall(follower: FollowerSpec): Float64Array | null;
  /** Writes at most once a second while arms are told new things, and once more when `stop` is called. */
  watch(drive: Drive, clock: Clock): { stop(): void };
}

interface Remembered {
  readonly parked: boolean;
  readonly angles_deg: Readonly<Record<string, number>>;
}

const DEG = 180 / Math.PI;
const EVERY_US = US_PER_S;

/** Where the memory of the rig at `path` lies: $XDG_STATE_HOME, or ~/.local/state. */
export function wakeMemoryFile(rigPath: string, env: NodeJS.ProcessEnv): string {
  const base = env['XDG_STATE_HOME'] ?? join(homedir(), '.local', 'state');
  const id = createHash('sha256').update(rigPath).digest('hex').slice(0, 16);
  return join(base, 'eidograph', `wake-${id}.json`);
}

/** @param onFault told once when the file cannot be written: the run goes on without memory */
export function wakeMemory(file: string, onFault: (detail: string) => void): WakeMemory {
  const known = read(file);
  let told = false;

  const write = (drive: Drive): void => {
    const all: Record<string, Remembered> = { ...known };
    for (const { spec, arm, is, commands } of drive.followers) {
      if (commands === 0) continue;
      const angles = spec.joints.map((joint, j) => [joint.name, (arm.governor.x[j] as number) * DEG] as const);
      all[spec.name] = { parked: !is.moving && arm.atRest(), angles_deg: Object.fromEntries(angles) };
    }
    try {
      mkdirSync(dirname(file), { recursive: true });
      // Renamed into place, so that a cut never leaves half a pose.
      writeFileSync(`${file}.new`, `${JSON.stringify(all, null, 1)}\n`);
      renameSync(`${file}.new`, file);
    } catch (fault) {
      if (!told) onFault(String(fault));
      told = true;
    }
  };

  return {
    recall(follower) {
      const last = Object.hasOwn(known, follower.name) ? known[follower.name] : undefined;
      if (last === undefined || last.parked) return null;
      return Float64Array.from(follower.joints, (joint) => {
        const deg = last.angles_deg[joint.name];
        return typeof deg === 'number' && Number.isFinite(deg) ? deg / DEG : joint.restRad;
      });
    },
    watch(drive, clock) {
      let written = 0;
      const total = (): number => drive.followers.reduce((sum, f) => sum + f.commands, 0);
      const turn = (): void => {
        if (total() !== written) {
          written = total();
          write(drive);
        }
        cancel = clock.at(clock.nowUs() + EVERY_US, turn);
      };
      let cancel = clock.at(clock.nowUs() + EVERY_US, turn);
      return {
        stop() {
          cancel();
          if (total() > 0) write(drive);
        },
      };
    },
  };
}

/** A file that cannot be read or understood is no memory: the arm then wakes at rest, and the operator is asked. */
function read(file: string): Readonly<Record<string, Remembered>> {
  try {
    const parsed: unknown = JSON.parse(readFileSync(file, 'utf8'));
    if (typeof parsed !== 'object' || parsed === null) return {};
    return Object.fromEntries(Object.entries(parsed).filter(([, value]) => isRemembered(value)));
  } catch {
    return {};
  }
}

function isRemembered(value: unknown): value is Remembered {
  return (
    typeof value === 'object' &&
    value !== null &&
    'parked' in value &&
    typeof value.parked === 'boolean' &&
    'angles_deg' in value &&
    typeof value.angles_deg === 'object' &&
    value.angles_deg !== null
  );
}
