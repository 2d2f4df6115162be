import { readdirSync } from 'node:fs';

/** Every file below profiles/, by its path there. */
export function profileFiles(): readonly string[] {
  return readdirSync('profiles', { recursive: true, encoding: 'utf8' }).filter((file) => file.endsWith('.yaml'));
}
