import { resolve } from 'node:path';
import { wakeMemory, wakeMemoryFile } from '../bridge/wake-memory.ts';
import { isTakeFault } from '../take/fault.ts';
import { takesFolder } from '../take/folder.ts';
import { pacedReel } from '../take/paced-reel.ts';
import { readingAhead } from '../take/read-ahead.ts';
import { reel } from '../take/reel.ts';
import { driving } from './driving.ts';
import { rigOrMistakes } from './load.ts';
import type { PlayOptions } from './take-play-options.ts';
import { portOf } from './port-of.ts';
import { takeOrStatus } from './take-files.ts';
import { loopBlendS, paceFor } from './take-pace.ts';
import { playing } from './take-playing.ts';
import { recording } from './take-recording.ts';
import { castRig, scoreFor } from './take-score.ts';
import { refusedStatus } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';
import type { World } from './world.ts';

const NEEDS_JOIN = 'there is no terminal to ask for the go; say --join to let the arms start without asking';

/** Plays a take on a rig, alone or with some joints in the hand; resolves with the exit status. */
export async function playTake(name: string, options: PlayOptions, world: World, at: TakeWorld): Promise<number> {
  const { err, terminal, env, clock } = world;
  const loaded = rigOrMistakes(options.rig, err.write);
  if (loaded === null) return 2;
  if ((terminal === null || options.json) && !options.join) {
    err.write(`error: ${NEEDS_JOIN}\n`);
    return 2;
  }
  const folder = takesFolder(options.takes, env);
  const take = takeOrStatus(at, folder, name);
  if (typeof take === 'number') return take;
  try {
    const rig = castRig(take, loaded.rig, options);
    const score = isTakeFault(rig) ? rig : scoreFor(take, rig, options);
    if (isTakeFault(rig)) return refusedStatus(rig, at.err);
    if (isTakeFault(score)) return refusedStatus(score, at.err);
    const paced = await paceFor(take, rig, score, options, at);
    if (paced !== null && 'status' in paced) return paced.status;
    const ahead = readingAhead(take);
    const rows =
      paced === null
        ? reel(ahead, { ...score, loopBlendS: loopBlendS(options) })
        : pacedReel({ ...paced.motion, take: ahead }, paced.factors);
    const layered =
      options.layer === null
        ? null
        : recording(
            { folder, name: options.layer.as, countInUs: null, marks: [], rig, profiles: loaded.profiles },
            err.write,
          );
    if (options.layer !== null && layered === null) return 2;
    const companion = playing(take, rig, rows, score, paced !== null, options, layered);
    return await driving(
      {
        rig,
        openPort: (board) => portOf(rig, board, clock),
        memory: (onFault) => wakeMemory(wakeMemoryFile(resolve(options.rig), env), onFault),
        unasked: options.join,
        dry: false,
        real: true,
        forUs: null,
        json: options.json,
        logLevel: 'warn',
        logFile: null,
        companion,
      },
      world,
    );
  } finally {
    take.close();
  }
}
