import { readdirSync, readFileSync } from 'node:fs';
import { posix } from 'node:path';
import { describe, expect, test } from 'vitest';

// Lowest first; a file may import from its own row and from rows before it.
const ROWS = [
  ['errors', 'units', 'finding'],
  ['json'],
  ['numerics'],
  ['spectrum'],
  ['electrolyte'],
  ['estimation'],
  ['calibration'],
  ['assay'],
  ['tanks', 'bench'],
  ['io', 'report'],
  ['index'],
  ['cli', 'page'],
];

/** Each library has its room: an adapter names its traps in one place. */
const LIBRARIES: ReadonlyArray<readonly [RegExp, RegExp]> = [
  [/^node:/, /^(io\/files\.ts|cli\/.+)$/],
  [/^(ml-|pure-rand)/, /^numerics\//],
  [/^papaparse/, /^io\//],
  [/^valibot/, /^(io|calibration|json)\//],
  [/^(commander|cli-progress)/, /^cli\//],
  [/^(preact|d3-)/, /^(report|page)\//],
];

const room = (file: string) => file.split('/')[0]!.replace(/\.tsx?$/, '');
const height = (file: string) => ROWS.findIndex((row) => row.includes(room(file)));
const files = readdirSync('src', { recursive: true, encoding: 'utf8' }).filter((file) => /\.tsx?$/.test(file));
const IMPORT = /(?:^|[;}\s])(?:import|export)\b[^'";]*?\bfrom\s*['"]([^'"]+)['"]|\bimport\s*\(?\s*['"]([^'"]+)['"]/g;

const importsOf = (text: string): string[] => [...text.matchAll(IMPORT)].map(([, from, bare]) => from ?? bare!);

describe('layers', () => {
  test.each(files)('src/%s looks downwards only', (file) => {
    expect(height(file), `no row for ${room(file)}`).toBeGreaterThanOrEqual(0);
    const text = readFileSync(`src/${file}`, 'utf8');
    for (const target of importsOf(text)) {
      const up = target.startsWith('.') && height(posix.join(posix.dirname(file), target)) > height(file);
      expect(up, `${file} → ${target}`).toBe(false);
      for (const [library, home] of LIBRARIES) if (library.test(target)) expect(file, target).toMatch(home);
    }
    expect(text, 'named exports only').not.toMatch(/^export default\b/m);
  });

  test.each([
    [`import { a } from './a.ts';`],
    [`import type { a } from './a.ts';`],
    [`export * from './a.ts';`],
    [`import './a.ts';`],
    [`const a = await import('./a.ts');`],
    [`import {\n  a,\n  b,\n} from './a.ts';`],
  ])('the test sees %j', (line) => {
    expect(importsOf(line)).toEqual(['./a.ts']);
  });
});
