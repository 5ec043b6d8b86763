import Papa from 'papaparse';
import { bench, describe } from 'vitest';
import { seededRandom } from '../../src/numerics/random.ts';
import { parseSpectraChunks } from '../../src/io/spectra.ts';

// Peer: papaparse alone on the same text, which stops at strings. Ours ends in checked spectra.

const ROUNDS = { iterations: 5, time: 0, warmupIterations: 1, warmupTime: 0 };

function table(rows: number, columns: number): Uint8Array {
  const random = seededRandom(1);
  const lines = [['nm', ...Array.from({ length: columns }, (_, i) => `s${i}`)].join(',')];
  for (let i = 0; i < rows; i++) {
    const values = Array.from({ length: columns }, () => (1.5 * random.uniform()).toFixed(5));
    lines.push([(345 + i * 0.19).toFixed(2), ...values].join(','));
  }
  return new TextEncoder().encode(`${lines.join('\n')}\n`);
}

describe.each([
  ['3648 points, 11 columns', 3648, 11],
  ['350 points, 20,000 columns', 350, 20_000],
])('%s', (_, rows, columns) => {
  const bytes = table(rows, columns);
  const size = `${(bytes.length / 1e6).toFixed(1)} MB`;
  bench(`spectra from ${size}`, () => void parseSpectraChunks([bytes], 'table.csv'), ROUNDS);
  bench(`papaparse alone, ${size}`, () => void Papa.parse(new TextDecoder().decode(bytes), { delimiter: ',' }), ROUNDS);
});
