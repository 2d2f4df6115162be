import { spawnSync } from 'node:child_process';
import { copyFileSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { firmwareHex } from '../../tools/firmware.ts';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const KEPT = join('.cache', 'firmware', 'StandardFirmata.uno.hex');

describe('fetching the firmware without a network', () => {
  let elsewhere: string;
  beforeEach(() => {
    // The tool keeps the firmware beside itself, so a copy of it starts with nothing.
    elsewhere = mkdtempSync(join(tmpdir(), 'firmware-'));
    mkdirSync(join(elsewhere, 'tools'));
    copyFileSync(join(ROOT, 'tools', 'firmware.ts'), join(elsewhere, 'tools', 'firmware.ts'));
    writeFileSync(join(elsewhere, 'package.json'), '{ "type": "module" }');
  });
  afterEach(() => rmSync(elsewhere, { recursive: true, force: true }));

  const fetched = () =>
    spawnSync(
      process.execPath,
      [join(ROOT, 'node_modules', 'tsx', 'dist', 'cli.mjs'), join(elsewhere, 'tools', 'firmware.ts')],
      {
        encoding: 'utf8',
        env: {
          ...process.env,
          npm_config_registry: 'http://127.0.0.1:9/',
          npm_config_fetch_retries: '0',
          npm_config_cache: join(elsewhere, 'npm'),
        },
      },
    );

  it('fails and says what to do', () => {
    const { status, stderr } = fetched();
    expect(status).toBe(1);
    expect(stderr).toContain('Connect to a network');
    expect(stderr).toContain('npx tsx tools/firmware.ts');
  });

  it('does not make do with a kept file that is another build', () => {
    mkdirSync(join(elsewhere, '.cache', 'firmware'), { recursive: true });
    writeFileSync(join(elsewhere, KEPT), ':00000001FF\r\n');
    expect(fetched().status).toBe(1);
  });

  it('needs none when the pinned build is there already', async () => {
    await firmwareHex();
    mkdirSync(join(elsewhere, '.cache', 'firmware'), { recursive: true });
    copyFileSync(join(ROOT, KEPT), join(elsewhere, KEPT));
    const { status, stdout } = fetched();
    expect(status).toBe(0);
    expect(stdout.trim()).toBe(join(elsewhere, KEPT));
  });
});
