import { spawnSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { plant, ROOT } from './planted.ts';

/** A whole program is started, on a machine that may be busy. */
const LIMIT_MS = 60_000;

interface Cruise {
  readonly modules: readonly { readonly source: string }[];
  readonly summary: {
    readonly violations: readonly {
      readonly rule: { readonly name: string };
      readonly from: string;
      readonly to: string;
    }[];
  };
}

function cruise(folder: string): Cruise {
  const program = join(ROOT, 'node_modules', 'dependency-cruiser', 'bin', 'dependency-cruise.mjs');
  const config = join(ROOT, '.dependency-cruiser.cjs');
  const run = spawnSync(process.execPath, [program, 'src', '--config', config, '--output-type', 'json'], {
    cwd: folder,
    encoding: 'utf8',
    maxBuffer: 2 ** 26,
  });
  if (run.stdout === '') throw new Error(run.stderr);
  return JSON.parse(run.stdout) as Cruise;
}

/** Each rule with a file that breaks it, and nothing else. */
const VIOLATIONS: readonly { rule: string; from: string; text: string; to: string }[] = [
  {
    rule: 'map-imports-only-rooms-above',
    from: 'src/map/type-from-below.ts',
    text: "import type { Room } from '../drive/room.ts';\nexport type Below = Room;\n",
    to: 'src/drive/room.ts',
  },
  {
    rule: 'clock-imports-only-rooms-above',
    from: 'src/clock/value-from-below.ts',
    text: "import { room } from '../map/room.ts';\nexport const below = room;\n",
    to: 'src/map/room.ts',
  },
  {
    rule: 'panel-imports-only-rooms-above',
    from: 'src/panel/from-cli.ts',
    text: "import { room } from '../cli/room.ts';\nexport const below = room;\n",
    to: 'src/cli/room.ts',
  },
  {
    rule: 'every-import-lives-in-a-room',
    from: 'src/cli/imports-a-stray.ts',
    text: "import { room } from '../stray/room.ts';\nexport const stray = room;\n",
    to: 'src/stray/room.ts',
  },
  {
    rule: 'every-file-lives-in-a-room',
    from: 'src/stray/imports-a-room.ts',
    text: "import { room } from '../map/room.ts';\nexport const stray = room;\n",
    to: 'src/map/room.ts',
  },
  {
    rule: 'public-surface-last',
    from: 'src/cli/from-the-surface.ts',
    text: "import { room } from '../index.ts';\nexport const surface = room;\n",
    to: 'src/index.ts',
  },
  {
    rule: 'fit-and-take-apart',
    from: 'src/take/from-fit.ts',
    text: "import { room } from '../fit/room.ts';\nexport const fit = room;\n",
    to: 'src/fit/room.ts',
  },
  {
    rule: 'kernels-see-wire-types-only',
    from: 'src/leader/codec.ts',
    text: "import { room } from '../wire/room.ts';\nexport const codec = room;\n",
    to: 'src/wire/room.ts',
  },
  {
    rule: 'kernels-know-no-port',
    from: 'src/follower/port.ts',
    text: "import type { Room } from '../port/room.ts';\nexport type Port = Room;\n",
    to: 'src/port/room.ts',
  },
  {
    rule: 'pure-rooms-stay-pure',
    from: 'src/wire/socket.ts',
    text: "import { readFileSync } from 'node:fs';\nexport const read = readFileSync;\n",
    to: 'fs',
  },
  {
    rule: 'streams-start-at-the-bridge',
    from: 'src/sim/stream.ts',
    text: "import { Subject } from 'rxjs';\nexport const stream = new Subject();\n",
    to: 'rxjs',
  },
  {
    rule: 'ports-behind-the-port-room',
    from: 'src/bridge/serial.ts',
    text: "import { SerialPort } from 'serialport';\nexport const serial = SerialPort;\n",
    to: 'serialport',
  },
  {
    rule: 'time-is-injected',
    from: 'src/bridge/sleep.ts',
    text: "import { setTimeout as sleep } from 'node:timers/promises';\nexport const wait = sleep;\n",
    to: 'timers/promises',
  },
  {
    rule: 'no-circles',
    from: 'src/map/one.ts',
    text: "import type { Other } from './other.ts';\nexport type One = Other | null;\n",
    to: 'src/map/other.ts',
  },
  {
    rule: 'product-apart-from-its-tests',
    from: 'src/cli/from-tests.ts',
    text: "import { room } from '../../tests/room.ts';\nexport const test = room;\n",
    to: 'tests/room.ts',
  },
  {
    rule: 'product-needs-no-dev-package',
    from: 'src/cli/dev-package.ts',
    text: "import fc from 'fast-check';\nexport const check = fc;\n",
    to: 'fast-check',
  },
  {
    rule: 'everything-resolves',
    from: 'src/cli/nowhere.ts',
    text: "import { room } from './not-there.ts';\nexport const nowhere = room;\n",
    to: './not-there.ts',
  },
];

const ROOM = "export const room = 'a room';\nexport type Room = typeof room;\n";
const INNOCENT: Readonly<Record<string, string>> = {
  'package.json': readFileSync(join(ROOT, 'package.json'), 'utf8'),
  ...Object.fromEntries(
    ['map', 'wire', 'port', 'drive', 'fit', 'cli', 'stray'].map((name) => [`src/${name}/room.ts`, ROOM]),
  ),
  'src/index.ts': "export { room } from './drive/room.ts';\n",
  'src/map/other.ts': "import type { One } from './one.ts';\nexport type Other = One | string;\n",
  'src/drive/above.ts':
    "import { room } from '../map/room.ts';\nimport type { Room } from '../wire/room.ts';\nexport const above: Room = room;\n",
  'src/bridge/stream.ts': "import { Subject } from 'rxjs';\nexport const stream = new Subject();\n",
  'tests/room.ts': ROOM,
};

describe('the boundaries between rooms', { timeout: LIMIT_MS }, () => {
  const tree = plant({ ...INNOCENT, ...Object.fromEntries(VIOLATIONS.map(({ from, text }) => [from, text])) });
  const { violations } = cruise(tree.folder).summary;
  afterAll(() => tree.remove());

  it.each(VIOLATIONS)('report a planted violation of $rule', ({ rule, from, to }) => {
    const found = violations.filter((violation) => violation.rule.name === rule && violation.from === from);
    expect(found.map((violation) => violation.to.replace(/^.*node_modules\/([^/]+)\/.*$/, '$1'))).toEqual([to]);
  });

  it('report nothing in files that keep them', () => {
    const kept = ['src/drive/above.ts', 'src/bridge/stream.ts', 'src/index.ts'];
    expect(violations.filter((violation) => kept.includes(violation.from))).toEqual([]);
  });

  it('are drawn over every source file, so that green is not blindness', () => {
    const files = readdirSync(join(ROOT, 'src'), { recursive: true, encoding: 'utf8' })
      .filter((name) => name.endsWith('.ts'))
      .map((name) => `src/${name}`);
    const seen = new Set(cruise(ROOT).modules.map((module) => module.source));
    expect(files.filter((file) => !seen.has(file))).toEqual([]);
    expect(files.length).toBeGreaterThan(20);
  });

  it('have a planted violation for every rule but the repetition of a row', () => {
    const config = readFileSync(join(ROOT, '.dependency-cruiser.cjs'), 'utf8');
    const named = [...config.matchAll(/name: '([a-z-]+)'/g)].map((match) => match[1]);
    expect(named.filter((name) => !VIOLATIONS.some(({ rule }) => rule === name))).toEqual([]);
  });
});
