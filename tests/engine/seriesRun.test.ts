import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { afterAll, describe, expect, test } from 'vitest';
import { runSeries } from '../../src/cli/seriesRun.ts';
import type { SeriesPiece, SeriesPieceResults } from '../../src/cli/seriesChunk.ts';
import type { Piece } from '../../src/cli/seriesSource.ts';
import { WorkerLost, WorkerPool } from '../../src/cli/workerPool.ts';
import { wideHeader, wideRows } from '../../src/io/wideRows.ts';
import type { SeriesRecord } from '../../src/report/seriesNdjson.ts';

const folder = mkdtempSync(join(tmpdir(), 'tankhue-pool-'));
afterAll(() => rmSync(folder, { recursive: true }));

const wide = wideHeader('time,430,440,450,460,470')!;
const row = (i: number, last = '0.5'): string => `${i},0.1,0.2,0.3,0.4,${last}\n`;
const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);

/** A pool that counts rows, and loses its worker on a line that holds the word. */
const poolThatFailsOn = (poison: string, times = Infinity) => {
  let failures = 0;
  return {
    run: ({ bytes }: SeriesPiece): Promise<SeriesPieceResults> => {
      if (new TextDecoder().decode(bytes).includes(poison) && failures < times) {
        failures += 1;
        return Promise.reject(new WorkerLost('killed'));
      }
      const { count, start, end, labels, header } = wideRows(bytes, wide);
      const numbers = new Float64Array(count).fill(0.5);
      return Promise.resolve({
        count,
        start,
        end,
        labels,
        header,
        stateOfCharge: numbers,
        uncertainty: numbers,
        total: numbers,
        totalUncertainty: numbers,
        match: numbers,
        diagnosis: new Int32Array(count),
        diagnoses: [{ state: 'sound', pair: 'V4/V5', findings: [] }],
        assayedBefore: new Int32Array(count),
        axis: new Int32Array(count),
        axes: ['430 to 470 nm, 5 points'],
      });
    },
  } as unknown as WorkerPool<SeriesPiece, SeriesPieceResults>;
};

async function* pieces(texts: readonly string[]): AsyncGenerator<Piece> {
  let offset = 0;
  for (const text of texts) {
    const bytes = bytesOf(text);
    yield { offset, bytes };
    offset += bytes.length;
  }
}

async function run(texts: readonly string[], pool: WorkerPool<SeriesPiece, SeriesPieceResults>) {
  const said: string[] = [];
  let out = '';
  const summary = await runSeries(
    pieces(texts),
    { layout: { kind: 'wide', wide }, bookmark: { byte: 0, row: 0, axisAt: 0 } },
    pool,
    2,
    { write: async (text) => void (out += text), tell: (text) => said.push(text), reached: () => undefined },
  );
  const found = out
    .split('\n')
    .filter(Boolean)
    .map((line) => JSON.parse(line) as SeriesRecord);
  return { summary, said, found };
}

const texts = [0, 1, 2, 3].map((piece) => Array.from({ length: 8 }, (_, i) => row(8 * piece + i)).join(''));

describe('a worker that is lost', () => {
  test('once: its piece is tried again, nothing is lost, nothing comes twice, and it is said', async () => {
    const { found, said, summary } = await run(texts, poolThatFailsOn('\n13,', 1));
    expect(found.map((record) => record.row)).toEqual(Array.from({ length: 32 }, (_, i) => i + 1));
    expect(found.every((record) => record.state === 'sound')).toBe(true);
    expect(said.filter((text) => text.includes('a worker was lost'))).toHaveLength(1);
    expect(summary).toMatchObject({ rows: 32, sound: 32, withheld: 0 });
  });

  test('always on one row: that row alone is withheld and named', async () => {
    const spoiled = texts.map((text) => text.replace(row(13), row(13, '0.5 poison')));
    const { found, summary } = await run(spoiled, poolThatFailsOn('poison'));
    expect(found.map((record) => record.row)).toEqual(Array.from({ length: 32 }, (_, i) => i + 1));
    const lost = found.filter((record) => record.state === 'withheld');
    expect(lost.map((record) => record.row)).toEqual([14]);
    expect(lost[0]!.findings.map((one) => one.code)).toEqual(['worker-lost']);
    expect(summary).toMatchObject({ rows: 32, withheld: 1 });
    found.slice(1).forEach((record, i) => expect(record.byte[0]).toBe(found[i]!.byte[1]));
  });
});

test('results are held back when they are not read: at most two pieces a worker are under way', async () => {
  let given = 0;
  let open: (() => void) | null = null;
  async function* counted(): AsyncGenerator<Piece> {
    for await (const piece of pieces(Array.from({ length: 40 }, () => texts[0]!))) {
      given += 1;
      yield piece;
    }
  }
  let written = 0;
  const running = runSeries(
    counted(),
    { layout: { kind: 'wide', wide }, bookmark: { byte: 0, row: 0, axisAt: 0 } },
    poolThatFailsOn('never'),
    2,
    {
      write: () => {
        written += 1;
        return written === 3 ? new Promise<void>((resolve) => (open = resolve)) : Promise.resolve();
      },
      tell: () => undefined,
      reached: () => undefined,
    },
  );
  await new Promise((resolve) => setTimeout(resolve, 50));
  expect(written).toBe(3);
  expect(given).toBeLessThanOrEqual(written + 2 * 2);
  open!();
  expect((await running).rows).toBe(320);
});

test('a thread that ends is replaced, and only its own task is refused', async () => {
  const script = join(folder, 'fragile.mjs');
  writeFileSync(
    script,
    `import { parentPort } from 'node:worker_threads';
     parentPort.on('message', (task) => (task === 'die' ? process.exit(7) : parentPort.postMessage(2 * task)));`,
  );
  const pool = new WorkerPool<number | 'die', number>(pathToFileURL(script), 2, null);
  const answers = await Promise.allSettled([pool.run(1), pool.run('die'), pool.run(3), pool.run('die'), pool.run(5)]);
  expect(answers.map((answer) => (answer.status === 'fulfilled' ? answer.value : answer.reason.name))).toEqual([
    2,
    'WorkerLost',
    6,
    'WorkerLost',
    10,
  ]);
  expect(await pool.run(21)).toBe(42);
  await pool.close();
});
