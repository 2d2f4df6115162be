import { InvalidArgumentError } from '@commander-js/extra-typings';
import { LOG_LEVELS, type LogLevel } from '../bridge/log.ts';
import { nearest } from '../port/nearest.ts';

/** Values of options, as people write them. What cannot be read is thrown as commander asks for it, and said by it. */

/** `25%`, `25 %` or `25`: a share of every speed limit, over 0 to 1. */
export function paceOption(text: string): number {
  const found = /^(\d+(?:\.\d+)?)\s*%?$/.exec(text.trim());
  const percent = Number(found?.[1]);
  if (found === null || !(percent >= 1 && percent <= 100)) {
    throw new InvalidArgumentError('A pace is a percentage from 1 to 100, such as 25%.');
  }
  return percent / 100;
}

const UNITS_US: Readonly<Record<string, number>> = { ms: 1e3, s: 1e6, min: 60e6, h: 3_600e6 };
const LONGEST_US = 30 * 24 * 3_600e6;

/** `500ms`, `10s`, `2min` or `1h`: microseconds. */
export function durationOption(text: string): number {
  const found = /^(\d+(?:\.\d+)?)\s*(ms|s|min|h)$/.exec(text.trim());
  const us = Number(found?.[1]) * (UNITS_US[found?.[2] ?? ''] ?? Number.NaN);
  if (!(us > 0 && us <= LONGEST_US)) {
    throw new InvalidArgumentError('A time is a number and its unit: 500ms, 10s, 2min or 1h.');
  }
  return Math.round(us);
}

/** Names of one option given once with commas, or several times. */
export function namesOption(text: string, before: readonly string[] | undefined): readonly string[] {
  const names = text
    .split(',')
    .map((name) => name.trim())
    .filter((name) => name !== '');
  if (names.length === 0) throw new InvalidArgumentError('Name one follower or more: wren or wren,stork.');
  return [...(before ?? []), ...names];
}

/** Names of marks, in the order in which they come; each may be any text without a comma. */
export function marksOption(text: string, before: readonly string[] | undefined): readonly string[] {
  const names = text.split(',').map((name) => name.trim());
  const wrong = names.find((name) => name === '' || name.length > MARK_LETTERS_MAX);
  if (wrong !== undefined)
    throw new InvalidArgumentError(`Name marks of 1 to ${MARK_LETTERS_MAX} letters, such as bow,turn,exit.`);
  return [...(before ?? []), ...names];
}

const MARK_LETTERS_MAX = 80;

export function logLevelOption(text: string): LogLevel {
  const level = LOG_LEVELS.find((known) => known === text);
  if (level === undefined) throw new InvalidArgumentError(`A log level is one of ${LOG_LEVELS.join(', ')}.`);
  return level;
}

/** The followers that `--only` and `--without` leave, or what is wrong with the two. */
export function chosenFollowers(
  all: readonly string[],
  only: readonly string[] | undefined,
  without: readonly string[] | undefined,
): { readonly keep: ReadonlySet<string> } | { readonly mistakes: readonly string[] } {
  const mistakes = [...wrongNames('--only', only, all), ...wrongNames('--without', without, all)];
  if (mistakes.length > 0) return { mistakes };
  const keep = new Set((only ?? all).filter((name) => !(without ?? []).includes(name)));
  if (keep.size > 0) return { keep };
  return { mistakes: ['--only and --without leave no follower; leave one of them out'] };
}

function wrongNames(option: string, names: readonly string[] | undefined, all: readonly string[]): readonly string[] {
  return (names ?? [])
    .filter((name) => !all.includes(name))
    .map((name) => {
      const near = nearest(name, all);
      const right = near === null ? `the rig has ${all.join(', ')}` : `did you mean ${near}?`;
      return `${option}: there is no follower ${name}; ${right}`;
    });
}
