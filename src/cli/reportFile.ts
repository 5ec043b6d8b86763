import { VERSION } from '../index.ts';
import { writeWhole } from '../io/files.ts';
import { tell } from './options.ts';

export const MADE_BY = `tankhue ${VERSION}`;

/** Writes a report and says where it lies; never over an input. */
export async function writeReport(path: string, make: () => Promise<string>, inputs: readonly string[]): Promise<void> {
  const html = await make();
  writeWhole(path, html, inputs);
  tell(`report: ${path} (${Math.round(html.length / 1000)} kB)`);
}
