import { Command, InvalidArgumentError, Option } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import type { Piece } from '../arm/stock.ts';
import { balanceLines } from '../check/balancing-text.ts';
import { balanceReport, balanceSubject, linkIndex } from '../check/balancing.ts';
import type { BalancedJoint, BalanceOptions, BalanceSubject } from '../check/balancing.ts';
import { nearest } from '../port/nearest.ts';
import { editYaml } from '../rig/edit.ts';
import type { Edit } from '../rig/edit.ts';
import { readFromDisk } from '../rig/file-reader.ts';
import type { ReadFile } from '../rig/file-reader.ts';
import { loadProfile } from '../rig/load.ts';
import type { LoadedProfile } from '../rig/load.ts';
import { mistakeLine } from '../rig/mistake.ts';
import { replaceFile } from '../rig/replace-file.ts';

/** Where a command prints: a stream, or a test's list. */
interface Out {
  write(text: string): unknown;
}

const EXPLAINED = `
Weights are found from the tip inward: each joint's sees those farther out. A weight that a link has
already is replaced. Stock is what the workshop has: "50,100,250 g" (any number of each), or
"5x50 g, 2x250 g". Springs are exact only where their fixed end does not turn.`;

/** `eidograph balance PROFILE` */
export function balanceCommand(
  out: Out = process.stdout,
  err: Out = process.stderr,
  readFile: ReadFile = readFromDisk,
  replace: typeof replaceFile = replaceFile,
): CommandUnknownOpts {
  return new Command('balance')
    .description('counterweights and springs that cancel the load of an arm')
    .argument('<profile>', 'a follower or leader file with arm: and masses')
    .addOption(
      new Option('--distance <mm>', 'distance of each weight from its axis').argParser(lengthOption).conflicts('mass'),
    )
    .addOption(new Option('--mass <g>', 'mass of each weight; its distance is found').argParser(massOption))
    .option('--joint <name>', 'balance this joint only; may stand several times', jointOption)
    .option('--stock <pieces>', 'pieces that weights are made of, such as "50,100,250 g"', stockOption)
    .option('--free <mm>', 'length of springs without load; 0 where a cord makes it so', lengthOrZeroOption)
    .option('--above <mm>', 'how far above the axis springs are held', lengthOption)
    .option('--along <mm>', 'how far along the link springs pull', lengthOption)
    .option('--springs', 'with --write: write springs instead of weights')
    .option('--write', 'put them into the profile, comments kept')
    .option('--keep', 'with --write: keep the old file as PROFILE.old')
    .option('--json', 'print one JSON object')
    .addHelpText('after', EXPLAINED)
    .action((file, options) => {
      const loaded = loadProfile(file, readFile);
      if ('mistakes' in loaded) {
        err.write(`${loaded.mistakes.map(mistakeLine).join('\n')}\n`);
        process.exitCode = 2;
        return;
      }
      const refuse = (sentence: string): void => {
        err.write(`${file}: ${sentence}\n`);
        process.exitCode = 2;
      };
      if (loaded.kind === 'rig') return refuse('this is a rig file; name the profile of one arm');
      const subject = balanceSubject(loaded);
      if (typeof subject === 'string') return refuse(subject);
      const wrong = wrongJoint(options.joint ?? [], subject);
      if (wrong !== null) return refuse(wrong);
      const report = balanceReport(subject, optionsOf(options));
      if (options.json === true) out.write(`${JSON.stringify({ file, ...report }, null, 2)}\n`);
      else out.write(`${balanceLines(report).join('\n')}\n`);
      process.exitCode = 0;
      if (options.write !== true) return;
      const edits = editsFor(loaded, report.joints, options.springs === true);
      if (edits.length === 0) return refuse('there is nothing to write');
      const text = readFile(file);
      if ('fault' in text) return refuse(`it cannot be read again: ${text.detail}`);
      const edited = editYaml(text.text, edits);
      if (typeof edited !== 'string') return refuse(editSentence(edited));
      const replaced = replace(file, text.text, edited, options.keep === true);
      if ('wrong' in replaced) return refuse(`${replaced.wrong}; ${replaced.right}`);
      const kept = replaced.kept === null ? '' : `; the old one is ${replaced.kept}`;
      err.write(`${file}: written${kept}\n`);
    });
}

interface Chosen {
  readonly distance?: number | undefined;
  readonly mass?: number | undefined;
  readonly joint?: readonly string[] | undefined;
  readonly stock?: readonly Piece[] | undefined;
  readonly free?: number | undefined;
  readonly above?: number | undefined;
  readonly along?: number | undefined;
}

function optionsOf({ distance, mass, joint, stock, free, above, along }: Chosen): BalanceOptions {
  return {
    only: joint ?? null,
    distanceMm: distance ?? null,
    massG: mass ?? null,
    stock: stock ?? null,
    springFreeMm: free ?? 0,
    springAboveMm: above ?? null,
    springAlongMm: along ?? null,
  };
}

function wrongJoint(names: readonly string[], { joints, arm }: BalanceSubject): string | null {
  const linked = arm.links.map(({ joint }) => joints[joint] ?? '');
  const unknown = names.find((name) => !linked.includes(name));
  if (unknown === undefined) return null;
  const near = nearest(unknown, linked);
  return `--joint: no link is turned by ${unknown}; ${near === null ? `known: ${linked.join(', ')}` : `did you mean ${near}?`}`;
}

function editsFor(loaded: LoadedProfile, joints: readonly BalancedJoint[], springs: boolean): readonly Edit[] {
  const { arm } = loaded.kind === 'leader' ? loaded.leader : loaded.follower;
  if (arm === undefined) return [];
  return joints.flatMap(({ joint, counterweight, spring }): readonly Edit[] => {
    const path = ['arm', 'links', linkIndex(arm, joint)];
    if (!springs)
      return counterweight === null ? [] : [{ path: [...path, 'counterweight'], value: { ...counterweight } }];
    if (spring === null) return [];
    const { n_per_mm, free_mm, from_mm, to_mm } = spring;
    return [{ path: [...path, 'spring'], value: { n_per_mm, free_mm, from_mm, to_mm } }];
  });
}

function editSentence({ fault, path }: { readonly fault: string; readonly path: string }): string {
  if (fault === 'no such place')
    return `${path} does not stand in this file but in one that it is like; balance that one`;
  return `${path} cannot be changed without changing what stands around it; write it by hand`;
}

function jointOption(name: string, before: readonly string[] | undefined): readonly string[] {
  return [...(before ?? []), name];
}

const LARGEST = 1e6;

function lengthOption(text: string): number {
  return measured(text, 'mm', 'A length is a number of millimetres above 0, such as 120 or 120 mm.', false);
}

function lengthOrZeroOption(text: string): number {
  return measured(text, 'mm', 'A length is a number of millimetres, such as 60 or 60 mm.', true);
}

function massOption(text: string): number {
  return measured(text, 'g', 'A mass is a number of grams above 0, such as 1500 or 1500 g.', false);
}

function measured(text: string, unit: string, right: string, zero: boolean): number {
  const found = new RegExp(`^(\\d+(?:\\.\\d+)?)\\s*(?:${unit})?$`).exec(text.trim());
  const value = Number(found?.[1]);
  if (!(value <= LARGEST && (value > 0 || (zero && value === 0)))) throw new InvalidArgumentError(right);
  return value;
}

/** What stands for any number of a piece: more than an arm is hung with. */
const ANY_NUMBER = 200;

/** `50,100,250 g` or `5x50 g, 2x250 g`. */
function stockOption(text: string): readonly Piece[] {
  return text.split(',').map((one) => {
    const found = /^(?:(\d{1,3})\s*[x×]\s*)?(\d+(?:\.\d+)?)\s*g?$/.exec(one.trim());
    const grams = Number(found?.[2]);
    if (found === null || !(grams > 0 && grams <= LARGEST))
      throw new InvalidArgumentError(
        'A stock is a list of pieces in grams, such as "50,100,250 g" or "5x50 g, 2x250 g".',
      );
    return { massKg: grams / 1000, count: found[1] === undefined ? ANY_NUMBER : Number(found[1]) };
  });
}
