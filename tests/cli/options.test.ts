import { describe, expect, it } from 'vitest';
import {
  chosenFollowers,
  durationOption,
  logLevelOption,
  marksOption,
  namesOption,
  paceOption,
} from '../../src/cli/options.ts';

describe('A pace', () => {
  it.each([
    ['25%', 0.25],
    ['25 %', 0.25],
    ['100', 1],
    ['1%', 0.01],
    ['12.5%', 0.125],
  ])('%s is a share of every speed limit', (text, share) => {
    expect(paceOption(text)).toBe(share);
  });

  it.each(['0%', '0.5', '101%', '-25%', 'slow', '', '25%%', 'Infinity'])('cannot be %j', (text) => {
    expect(() => paceOption(text)).toThrow('1 to 100');
  });
});

describe('A time', () => {
  it.each([
    ['500ms', 500_000],
    ['10s', 10_000_000],
    ['1.5 s', 1_500_000],
    ['2min', 120_000_000],
    ['1h', 3_600_000_000],
  ])('%s has a unit', (text, us) => {
    expect(durationOption(text)).toBe(us);
  });

  it.each(['10', '0s', '-1s', '1d', '', '9999h'])('cannot be %j', (text) => {
    expect(() => durationOption(text)).toThrow('10s');
  });
});

describe('Names of marks', () => {
  it('come with commas, in several options, or both, and may have blanks inside', () => {
    expect(marksOption('curtain up, bow', undefined)).toEqual(['curtain up', 'bow']);
    expect(marksOption('exit', ['bow'])).toEqual(['bow', 'exit']);
  });

  it.each(['', 'bow,,exit', 'x'.repeat(81)])('cannot be %j', (text) => {
    expect(() => marksOption(text, undefined)).toThrow('1 to 80 letters');
  });
});

describe('Names', () => {
  it('come with commas, in several options, or both', () => {
    expect(namesOption('wren, stork', undefined)).toEqual(['wren', 'stork']);
    expect(namesOption('heron', ['wren'])).toEqual(['wren', 'heron']);
  });

  it('cannot be none', () => {
    expect(() => namesOption(' , ', undefined)).toThrow('Name one');
  });

  const ALL = ['wren', 'heron', 'stork'];
  it('choose followers', () => {
    expect(chosenFollowers(ALL, ['stork', 'wren'], undefined)).toEqual({ keep: new Set(['stork', 'wren']) });
    expect(chosenFollowers(ALL, undefined, ['stork'])).toEqual({ keep: new Set(['wren', 'heron']) });
    expect(chosenFollowers(ALL, ['stork', 'wren'], ['stork'])).toEqual({ keep: new Set(['wren']) });
    expect(chosenFollowers(ALL, undefined, undefined)).toEqual({ keep: new Set(ALL) });
  });

  it('that no follower has are mistakes, with the nearest or all of them', () => {
    expect(chosenFollowers(ALL, ['wern'], ['crocodile'])).toEqual({
      mistakes: [
        '--only: there is no follower wern; did you mean wren?',
        '--without: there is no follower crocodile; the rig has wren, heron, stork',
      ],
    });
  });

  it('that leave nobody are a mistake', () => {
    expect(chosenFollowers(ALL, ['wren'], ['wren'])).toHaveProperty('mistakes');
  });
});

describe('A log level', () => {
  it('is one of those that are listed', () => {
    expect(logLevelOption('debug')).toBe('debug');
    expect(() => logLevelOption('loud')).toThrow('silent, fatal');
  });
});
