import { spawnSync } from 'node:child_process';
import { mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

/** Runs the built command as a process. */
export function tankhue(...words: string[]): { status: number | null; stdout: string; stderr: string } {
  return spawnSync(process.execPath, ['dist/cli/main.js', ...words], { encoding: 'utf8', maxBuffer: 1 << 28 });
}

/** A fresh folder with files in it; returns the way to each name. */
export function folderWith(files: Readonly<Record<string, string>>): (name: string) => string {
  const folder = mkdtempSync(join(tmpdir(), 'tankhue-'));
  for (const [name, text] of Object.entries(files)) writeFileSync(join(folder, name), text);
  return (name) => join(folder, name);
}
