import { Command, InvalidArgumentError, Option } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { durationOption } from './options.ts';
import type { PlayOptions } from './take-play-options.ts';
import { realTakeWorld, type TakeWorld } from './take-world.ts';
import { realWorld, type World } from './world.ts';

const EXPLAINED = `
A take is one file of the takes folder, NAME.arrows: an Arrow stream that any Arrow reader opens. Takes live
in $XDG_DATA_HOME/eidograph/takes (~/.local/share/eidograph/takes), or where --takes says. Nothing is ever
written over: each edit makes a new take that remembers its parents.

Moments are marks, or times such as 2.5s, 500ms or -1s (from the end).`;

const BEST_EXPLAINED = `
Each take gets a place in each of five: spectral arc length, log dimensionless jerk, how long joints were held back,
dropouts, and how far it is from the other takes, laid over each other in time. The least sum of places is best.`;

/** `eidograph take …`: each subcommand loads what it needs, so that the others start without it. */
export function takeCommand(
  world: () => TakeWorld = realTakeWorld,
  stage: () => World = realWorld,
): CommandUnknownOpts {
  const play = async (name: string, options: PlayOptions): Promise<number> => {
    const { playTake } = await import('./take-play.ts');
    return playTake(name, options, stage(), world());
  };
  const take = new Command('take')
    .description('list, show, play, edit, compare, choose and export recordings')
    .addHelpText('after', EXPLAINED);

  take.addCommand(
    folder(new Command('list').description('list the takes'))
      .option('--json', 'print them as JSON', false)
      .action(async (options) => {
        const { listTakes } = await import('./take-show.ts');
        process.exitCode = await listTakes({ json: options.json, takes: options.takes }, world());
      }),
  );
  take.addCommand(
    folder(new Command('show').description('tell what a take holds: marks, joints, peaks, smoothness, limited spans'))
      .argument('<name>')
      .option('--json', 'print it as JSON', false)
      .option('--svg <file>', 'draw every joint over time, with marks and with what held it back')
      .option('--only <followers>', 'draw only these followers; several with commas', listed)
      .action(async (name, { json, takes, svg, only }) => {
        const { showTake } = await import('./take-show.ts');
        process.exitCode = await showTake(name, { json, takes, svg, only: only ?? [] }, world());
      }),
  );
  take.addCommand(
    edited('trim', 'keep one stretch of a take')
      .argument('<name>')
      .option('--from <moment>', 'where it begins')
      .option('--to <moment>', 'where it ends')
      .action(async (name, { takes, as, from, to }) => {
        const { trimTake } = await import('./take-edit.ts');
        process.exitCode = await trimTake(name, { takes, as, from, to }, world());
      }),
  );
  take.addCommand(
    edited('splice', 'join two takes by a minimum-jerk blend')
      .argument('<first>')
      .argument('<second>')
      .addOption(new Option('--blend <time>', 'length of the blend').argParser(durationOption).default(1_000_000, '1s'))
      .action(async (first, second, { takes, as, blend }) => {
        const { spliceTakes } = await import('./take-edit.ts');
        process.exitCode = await spliceTakes([first, second], { takes, as, blendUs: blend }, world());
      }),
  );
  take.addCommand(
    edited('smooth', 'filter a take forward and backward, without delay, and say how far it then is from the raw one')
      .argument('<name>')
      .requiredOption('--cutoff <hz>', 'what is faster than this is taken out', positive)
      .action(async (name, { takes, as, cutoff }) => {
        const { smoothTake } = await import('./take-edit.ts');
        process.exitCode = await smoothTake(name, { takes, as, cutoff }, world());
      }),
  );
  take.addCommand(
    edited('retime', 'make a take faster or slower')
      .argument('<name>')
      .requiredOption('--speed <factor>', '2 is twice as fast', positive)
      .action(async (name, { takes, as, speed }) => {
        const { retimeTake } = await import('./take-edit.ts');
        process.exitCode = await retimeTake(name, { takes, as, speed }, world());
      }),
  );
  take.addCommand(
    folder(new Command('compare').description('lay one take over another in time, and tell how far they differ'))
      .argument('<a>')
      .argument('<b>')
      .option('--timed', 'at the same instants, rather than laid over each other in time', false)
      .option('--json', 'print it as JSON', false)
      .action(async (a, b, options) => {
        const { compareTakes } = await import('./take-edit.ts');
        const { json, takes, timed } = options;
        process.exitCode = await compareTakes([a, b], { json, takes, timed }, world());
      }),
  );
  take.addCommand(
    folder(new Command('best').description('order takes of one motion, the best first'))
      .argument('<names...>')
      .option('--json', 'print it as JSON', false)
      .addHelpText('after', BEST_EXPLAINED)
      .action(async (names, { takes, json }) => {
        const { bestTake } = await import('./take-best.ts');
        process.exitCode = await bestTake(names, { takes, json }, world());
      }),
  );
  take.addCommand(
    folder(new Command('export').description('write takes as one table: CSV, JSON Lines or Parquet'))
      .argument('<names...>')
      .option('--out <file>', 'where to; standard output when left out')
      .addOption(
        new Option('--format <format>', "in place of the file's ending").choices(['csv', 'jsonl', 'parquet'] as const),
      )
      .option('--columns <patterns>', 'only these, with commas; * stands for any part: t_us,wren.*', listed)
      .option('--rate <hz>', 'at even instants rather than at every event', positive)
      .action(async (names, { takes, out, format, columns, rate }) => {
        const { exportCommand } = await import('./take-export.ts');
        process.exitCode = await exportCommand(names, { takes, out, format, columns: columns ?? [], rate }, world());
      }),
  );
  take.addCommand(
    played('play', 'play a take on a rig (arms move: see the cautions of "eidograph run --help")')
      .option('--as-commands', 'the recorded angles of each follower, rather than the leader that made them')
      .option('--loop [blend]', 'over and over, its end joined to its start by a blend (1s)', durationOption)
      .option('--keep-limits', 'as much slower as it takes for every follower to keep its limits')
      .option('--weight', 'each follower slower by the root of its size, as its weight would have it')
      .option('--stay', 'stand where it ended rather than park and leave')
      .action(async (name, options) => {
        const { asCommands, loop, keepLimits, weight, stay, ...rest } = options;
        process.exitCode = await play(name, {
          ...playOptions(rest),
          by: asCommands === true ? 'commands' : 'leader',
          loopBlendUs: loop === undefined ? null : loop === true ? LOOP_BLEND_US : loop,
          keepLimits: keepLimits === true,
          weight: weight === true,
          stay: stay === true,
          layer: null,
        });
      }),
  );
  take.addCommand(
    played('layer', 'record some joints by hand while the rest play from a take; the result is a new take')
      .requiredOption('--as <name>', 'name of the new take')
      .requiredOption('--joints <names>', 'leader joints that stay in the hand, with commas', listed)
      .action(async (name, { as, joints, ...rest }) => {
        const layer = { as, joints };
        const plain = { by: 'leader', loopBlendUs: null, keepLimits: false, weight: false, stay: false } as const;
        process.exitCode = await play(name, { ...playOptions(rest), ...plain, layer });
      }),
  );
  return take;
}

const LOOP_BLEND_US = 1_000_000;
const COUNT_IN_US = 3_000_000;

function played(name: string, description: string) {
  return folder(new Command(name).description(description))
    .argument('<name>')
    .requiredOption('--rig <rig>', 'the rig file')
    .option('--speed <factor>', '2 is twice as fast', positive, 1)
    .option('--from <moment>', 'where it begins')
    .option('--to <moment>', 'where it ends')
    .option('--map <old=new>', 'who plays what, where names differ; several with commas', listed)
    .addOption(
      new Option('--count-in <time>', 'before anything plays').argParser(durationOption).default(COUNT_IN_US, '3s'),
    )
    .option('--unattended', 'play although nobody holds the enable button')
    .option('--join', 'let the arms start without asking (needed where there is no terminal)')
    .option('--json', 'print the status as JSON, ten lines a second');
}

type Shared = Omit<PlayOptions, 'by' | 'loopBlendUs' | 'keepLimits' | 'weight' | 'stay' | 'layer'>;

function playOptions(options: ReturnType<ReturnType<typeof played>['opts']>): Shared {
  const { rig, takes, speed, from, to, map, countIn, unattended, join, json } = options;
  return {
    rig,
    takes,
    speed,
    from,
    to,
    map: map ?? [],
    countInUs: countIn,
    unattended: unattended === true,
    join: join === true,
    json: json === true,
  };
}

function folder<A extends unknown[]>(command: Command<A>): Command<A, { takes?: string | undefined }> {
  return command.option('--takes <folder>', 'where takes live');
}

function edited(name: string, description: string): Command<[], { takes?: string | undefined; as: string }> {
  return folder(new Command(name).description(description)).requiredOption('--as <name>', 'name of the new take');
}

function positive(text: string): number {
  const value = Number(text);
  if (!(value > 0 && value <= 1e6)) throw new InvalidArgumentError('A number over 0 is wanted, such as 1.5.');
  return value;
}

function listed(text: string, before: readonly string[] | undefined): readonly string[] {
  const items = text.split(',').map((item) => item.trim());
  return [...(before ?? []), ...items.filter((item) => item !== '')];
}
