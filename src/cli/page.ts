import type { Command } from 'commander';
import { fileURLToPath } from 'node:url';
import { readFileBytes, requireWritable, writeWhole } from '../io/files.ts';
import { tell } from './options.ts';

/** The page as it was built beside this file. */
const PAGE = fileURLToPath(new URL('../page/tankhue.html', import.meta.url));

export function register(program: Command): void {
  program
    .command('page')
    .description('the same work in a browser: one HTML file that needs no network')
    .option('--out <file>', 'file to write', 'tankhue.html')
    .action(({ out }: { out: string }) => {
      requireWritable(out, [PAGE]);
      const page = readFileBytes(PAGE);
      writeWhole(out, page, [PAGE]);
      tell(`written: ${out} (${Math.round(page.length / 1000)} kB); open it in a browser`);
    });
}
