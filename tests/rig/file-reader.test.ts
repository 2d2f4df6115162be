import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { FILE_BYTES_MAX, readFromDisk } from '../../src/rig/file-reader.ts';
import { mistakesIn } from './memory.ts';

const folder = mkdtempSync(join(tmpdir(), 'eidograph-rig-'));
afterAll(() => rmSync(folder, { recursive: true }));

function written(name: string, content: string | Uint8Array): string {
  const file = join(folder, name);
  writeFileSync(file, content);
  return file;
}

describe('reading from the disk', () => {
  it('gives the text of a file, without a byte order mark', () => {
    expect(readFromDisk(written('a.yaml', 'rig: caf\u00e9\n'))).toEqual({ text: 'rig: caf\u00e9\n' });
    expect(readFromDisk(written('bom.yaml', '\uFEFFrig: a\n'))).toEqual({ text: 'rig: a\n' });
  });

  it('says what is missing, what is no file and what is no text', () => {
    expect(readFromDisk(join(folder, 'none.yaml'))).toMatchObject({ fault: 'missing' });
    expect(readFromDisk(join(written('b.yaml', ''), 'under-a-file.yaml'))).toMatchObject({ fault: 'missing' });
    expect(readFromDisk(folder)).toEqual({ fault: 'unreadable', detail: 'it is not a file' });
    const latin = readFromDisk(written('latin.yaml', Uint8Array.of(0x72, 0xe9, 0x0a)));
    expect(latin).toEqual({ fault: 'unreadable', detail: 'it is not UTF-8 text' });
  });

  it('takes a file of 1 MiB and refuses a larger one unread', () => {
    expect(readFromDisk(written('full.yaml', new Uint8Array(FILE_BYTES_MAX).fill(0x23)))).toHaveProperty('text');
    expect(readFromDisk(written('over.yaml', new Uint8Array(FILE_BYTES_MAX + 1)))).toMatchObject({
      fault: 'too large',
    });
  });

  it('holds any other reader to the same bound', () => {
    const [mistake] = mistakesIn({ 'rig.yaml': '#'.repeat(FILE_BYTES_MAX + 1) });
    expect(mistake).toMatchObject({ code: 'RIG_FILE_UNREADABLE', file: 'rig.yaml' });
  });
});
