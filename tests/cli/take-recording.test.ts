import { existsSync, mkdirSync, readdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { run } from '../../src/cli/run.ts';
import { recording, type RecordingDisk, type RecordingOptions } from '../../src/cli/take-recording.ts';
import { isTakeFault, takeFault } from '../../src/take/fault.ts';
import { openTake, type Take } from '../../src/take/reader.ts';
import { memoryDisk } from '../take/studio.ts';
import { scratch, smallRig, smallRigText } from './rigs.ts';
import { stage, type Stage } from './stage.ts';

const files = scratch();
afterAll(() => files.remove());
const RIG = files.write('small.yaml', smallRigText({ leaderKeys: 'buttons: []' }));
const GB = 1e9;

interface Studio {
  readonly disk: RecordingDisk;
  /** Names of files as they are now. */
  readonly there: () => readonly string[];
  take(name: string): Take;
  room(bytes: number | null): void;
}

/** A disk in memory, of which each file holds so many bytes. */
function studio(capacity = Number.POSITIVE_INFINITY): Studio {
  const kept = new Map<string, ReturnType<typeof memoryDisk>>();
  let free: number | null = 80 * GB;
  const nameOf = (file: string): string => file.slice(file.lastIndexOf('/') + 1);
  return {
    disk: {
      newFile(file) {
        if (kept.has(nameOf(file)))
          return { fault: takeFault('TAKE_EXISTS', nameOf(file), 'there is a take of this name') };
        const disk = memoryDisk(capacity);
        kept.set(nameOf(file), disk);
        return { disk };
      },
      freeBytes: () => free,
      remove: (file) => void kept.delete(nameOf(file)),
    },
    there: () => [...kept.keys()],
    take(name) {
      const folder = files.path('opened');
      mkdirSync(folder, { recursive: true });
      const file = join(folder, `${name}.arrows`);
      writeFileSync(file, kept.get(`${name}.arrows`)?.bytes() ?? '');
      const take = openTake(file);
      if (isTakeFault(take)) throw new Error(take.detail);
      return take;
    },
    room(bytes) {
      free = bytes;
    },
  };
}

interface Session extends Stage {
  readonly ending: Promise<number>;
  readonly of: Studio;
}

/** A run that starts without asking. */
const JOINED = {
  join: true,
  pace: undefined,
  only: undefined,
  without: undefined,
  dry: false,
  json: false,
  log: 'warn',
  logFile: undefined,
} as const;

function begun(
  options: Partial<RecordingOptions>,
  { of = studio(), terminal = true, forUs = undefined as number | undefined } = {},
): Session {
  const on = stage({ terminal, env: { XDG_STATE_HOME: files.path('state') }, size: { columns: 120, rows: 40 } });
  const ending = run(
    RIG,
    {
      ...JOINED,
      for: forUs,
      record: (rig, profiles) =>
        recording(
          { folder: files.path('takes'), name: null, countInUs: 0, marks: [], ...options, rig, profiles },
          on.world.err.write,
          of.disk,
        ),
    },
    on.world,
  );
  return { ...on, ending, of };
}

/** Leaves with both Ctrl-C, arms holding. */
async function left(session: Session): Promise<number> {
  session.type('\x03');
  await session.pass(500);
  session.type('\x03');
  return session.ended(session.ending);
}

describe('a recording', () => {
  it('begins with the very first event, shows the free space, and is shown while it goes on', async () => {
    const session = begun({ name: 'bow' });
    await session.pass(2_500);
    expect(session.screen()).toContain('recording bow; 80.0 GB free; m marks, t ends');
    expect(session.screen().split('\n')[0]).toMatch(/recording bow 2 s/);
    expect(await left(session)).toBe(130);
    const take = session.of.take('bow');
    expect([take.lostBytes, take.header.fromStart]).toEqual([null, true]);
    expect(take.durationUs).toBeGreaterThan(2_400_000);
  });

  it('gives marks the names that were said, in turn, then numbers, and says which comes next', async () => {
    const session = begun({ name: 'bow', marks: ['curtain', 'bow'] });
    await session.pass(1_000);
    for (const shown of ['bow: curtain; next is bow', 'bow: bow', 'bow: mark 3']) {
      session.type('m');
      await session.pass(200);
      expect(session.screen()).toContain(shown);
    }
    await left(session);
    expect(session.of.take('bow').marks.map(({ name }) => name)).toEqual(['curtain', 'bow', 'mark 3']);
  });

  it('begins and ends with a key, each time under the next free name, over none that is there', async () => {
    const session = begun({});
    await session.pass(500);
    session.type('m');
    await session.pass(100);
    expect(session.screen()).toContain('no take is being recorded; t begins one');
    session.type('t');
    await session.pass(1_500);
    expect(session.screen().split('\n')[0]).toContain('recording small-1 1 s');
    session.type('t');
    await session.pass(200);
    expect(session.screen()).toMatch(/recorded small-1: 1\.\d s, \d+ rows, 0 marks, in /);
    expect(session.screen().split('\n')[0]).not.toContain('recording');
    await left(session);
    const take = session.of.take('small-1');
    expect([take.lostBytes, take.header.fromStart]).toEqual([null, false]);
  });

  it('is refused before anything moves where its name is taken or none', () => {
    const of = studio();
    of.disk.newFile('bow.arrows');
    for (const [name, sentence] of [
      ['bow', /bow.*there is a take of this name; choose another name; a take is never written over/],
      ['../bow', /this is no name for a take; use letters/],
      ['a/b', /this is no name for a take; use letters/],
    ] as const) {
      const session = begun({ name }, { of });
      expect(session.err()).toMatch(sentence);
      expect(session.isOpen()).toBe(false);
    }
    expect(of.there()).toEqual(['bow.arrows']);
  });

  it('resolves with status 2 where it is refused', async () => {
    const session = begun({ name: '..' });
    expect(await session.ended(session.ending)).toBe(2);
  });
});

describe('a count-in', () => {
  it('counts, then records', async () => {
    const session = begun({ name: 'bow', countInUs: 3_000_000 });
    await session.pass(500);
    expect(session.screen()).toContain('recording bow in 3');
    expect(session.screen().split('\n')[0]).toContain('bow in 3 s');
    expect(session.of.there()).toEqual([]);
    await session.pass(4_000);
    expect(session.screen().split('\n')[0]).toContain('recording bow 1 s');
    await left(session);
    const take = session.of.take('bow');
    expect(take.header.fromStart).toBe(false);
    expect(take.durationUs).toBeLessThan(3_000_000);
  });

  it('that is left leaves no empty take behind', async () => {
    const session = begun({ name: 'bow', countInUs: 60_000_000 });
    await session.pass(1_000);
    expect(await left(session)).toBe(130);
    expect(session.of.there()).toEqual([]);
  });

  it('leaves the name to whoever takes it meanwhile, says so, and ends with status 1', async () => {
    const session = begun({ name: 'bow', countInUs: 2_000_000 }, { terminal: false, forUs: 8_000_000 });
    await session.pass(500);
    session.of.disk.newFile('bow.arrows');
    expect(await session.ended(session.ending)).toBe(1);
    expect(session.err()).toMatch(/no take is recorded: .*there is a take of this name/);
  });
});

describe('a disk that fills', () => {
  it('records nothing where there is hardly any room, and leaves no file', async () => {
    const of = studio();
    of.room(10e6);
    const session = begun({ name: 'bow' }, { of });
    expect(await session.ended(session.ending)).toBe(2);
    expect(session.err()).toMatch(
      /the disk of .* has 10\.0 MB left; make room, or name another takes folder with --takes/,
    );
    expect(of.there()).toEqual([]);
  });

  it('is told of when it gets low, and ends the recording while there is room for an end', async () => {
    const session = begun({ name: 'bow' });
    await session.pass(2_000);
    session.of.room(0.9e9);
    await session.pass(10_000);
    expect(session.screen()).toContain('the disk has 900.0 MB left');
    expect(session.screen().split('\n')[0]).toMatch(/recording bow \d+ s, 900\.0 MB free/);
    session.of.room(50e6);
    await session.pass(11_000);
    expect(session.screen()).toContain('the disk has 50.0 MB left: the recording ends');
    expect(session.screen()).toMatch(/recorded bow: \d+\.\d s, \d+ rows/);
    await left(session);
    expect(session.of.take('bow').lostBytes).toBeNull();
  });

  it('that takes no more is said within two seconds; the run goes on, what was written opens, and the status is 1', async () => {
    const session = begun({ name: 'bow' }, { of: studio(100_000), terminal: false, forUs: 8_000_000 });
    await session.pass(7_000);
    expect(session.err()).toMatch(
      /bow: the disk is full; make room.*what was written is kept \(\d\.\d s, \d+ rows, 0 marks\)/,
    );
    expect(await session.ended(session.ending)).toBe(1);
    const take = session.of.take('bow');
    expect(take.lostBytes).toBeNull();
    expect(take.rows).toBeGreaterThan(50);
    const { out } = session;
    expect(out()).toContain('ended: parked');
  });
});

describe('on the real disk', () => {
  it('a folder for takes that is none is said to be none, before anything moves', async () => {
    const file = files.write('letter.txt', 'Dear stork');
    for (const [folder, sentence] of [
      [file, /letter\.txt is no folder; look to the disk, or name another takes folder with --takes/],
      [
        join(file, 'takes'),
        /letter\.txt\/takes is no folder; look to the disk, or name another takes folder with --takes/,
      ],
    ] as const) {
      const said: string[] = [];
      const rig = smallRig();
      const made = recording(
        { folder, name: 'bow', countInUs: 0, marks: [], rig, profiles: null as never },
        (text) => void said.push(text),
      );
      expect(made).toBeNull();
      expect(said.join('')).toMatch(sentence);
    }
  });

  it('a run that ends during the count-in leaves nothing in the folder', async () => {
    const on = stage({ terminal: false, env: { XDG_STATE_HOME: files.path('state') } });
    const folder = files.path('real-takes');
    const made = (name: string): boolean => existsSync(join(folder, name));
    const options = { folder, name: 'bow', countInUs: 5_000_000, marks: [] };
    const ending = run(
      RIG,
      {
        ...JOINED,
        for: 1_000_000,
        record: (rig, profiles) => recording({ ...options, rig, profiles }, on.world.err.write),
      },
      on.world,
    );
    expect(await on.ended(ending)).toBe(0);
    expect(made('bow.arrows')).toBe(false);
    expect(readdirSync(folder)).toEqual([]);
  });
});
