import {
  chmodSync,
  lstatSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { replaceFile } from '../../src/rig/replace-file.ts';

let folder = '';
let file = '';
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'eidograph-'));
  file = join(folder, 'wren.yaml');
  writeFileSync(file, 'old\n');
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const read = (name: string): string => readFileSync(join(folder, name), 'utf8');

describe('a file that is replaced', () => {
  it('has the new text, its old mode, and nothing left beside it', () => {
    chmodSync(file, 0o664);
    expect(replaceFile(file, 'old\n', 'new\n', false)).toEqual({ kept: null });
    expect(read('wren.yaml')).toBe('new\n');
    expect(statSync(file).mode & 0o777).toBe(0o664);
    expect(readdirSync(folder)).toEqual(['wren.yaml']);
  });

  it('is kept with .old after its name when that is asked', () => {
    const kept = join(folder, 'wren.yaml.old');
    expect(replaceFile(file, 'old\n', 'new\n', true)).toMatchObject({
      kept: expect.stringMatching(/wren\.yaml\.old$/),
    });
    expect([read('wren.yaml'), readFileSync(kept, 'utf8')]).toEqual(['new\n', 'old\n']);
  });

  it('is left alone when somebody else has saved it meanwhile', () => {
    expect(replaceFile(file, 'older\n', 'new\n', true)).toMatchObject({ wrong: expect.stringContaining('meanwhile') });
    expect(read('wren.yaml')).toBe('old\n');
    expect(readdirSync(folder)).toEqual(['wren.yaml']);
  });

  it('is replaced where a link leads, and the link stays', () => {
    const link = join(folder, 'link.yaml');
    symlinkSync('wren.yaml', link);
    expect(replaceFile(link, 'old\n', 'new\n', false)).toEqual({ kept: null });
    expect(lstatSync(link).isSymbolicLink()).toBe(true);
    expect(read('wren.yaml')).toBe('new\n');
  });

  it('says why it cannot be', () => {
    expect(replaceFile(join(folder, 'gone.yaml'), 'old\n', 'new\n', false)).toMatchObject({
      wrong: expect.stringContaining('cannot be written'),
      right: expect.stringContaining('disk'),
    });
  });
});
