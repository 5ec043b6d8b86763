import { existsSync, readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { readAssayDocument } from '../../src/io/resultFile.ts';
import { assayReport } from '../../src/report/makeReport.ts';
import { readBack } from '../../src/report/readBack.ts';
import { folderWith, tankhue } from '../support/command.ts';
import { documentOf, inventedAssay, withheldAssay } from './inventedResults.ts';

const MADE_BY = 'tankhue test';
const both = documentOf([inventedAssay(), inventedAssay({ sample: 'P-1', side: 'positive', share: 0.55 })]);

/** Everything a person reads, without the record. */
const visible = (html: string): string =>
  html.replace(/<script[\s\S]*?<\/script>/g, '').replace(/<style[\s\S]*?<\/style>/g, '');

describe('an assay report', () => {
  test('needs no script and asks nothing of a network', async () => {
    const html = await assayReport(both, MADE_BY);
    expect(html.match(/<script[^>]*>/g)).toEqual(['<script type="application/json" id="tankhue-record">']);
    expect(visible(html)).not.toMatch(/(?:src|href)=|url\((?!#)|@import/);
    expect(html).toContain(`default-src 'none'`);
  });

  test('is the same file for the same results: no clock, no chance', async () => {
    expect(await assayReport(both, MADE_BY)).toBe(await assayReport(both, MADE_BY));
  });

  test('says the numbers, the inputs with their hashes and the calibration', async () => {
    const text = visible(await assayReport(both, MADE_BY));
    for (const part of ['60.00 ± 0.60', '1.600 ± 0.018', 'ab'.repeat(32), 'cd'.repeat(32), 'quay.csv', MADE_BY])
      expect(text).toContain(part);
    expect(text).toContain('The negative side is ahead by 5.0 points of charge, uncertain by 1.7 (95 %).');
  });

  test('shows no number of a withheld assay, but why and what to do', async () => {
    const text = visible(await assayReport(documentOf([withheldAssay()]), MADE_BY));
    expect(text).not.toContain('60.00');
    expect(text).not.toContain('1.600');
    expect(text).toContain('light passed beside the sample: 3 % of it, limit 1 %');
    expect(text).toContain('Do: tap the cell, fill it again and scan.');
  });

  test('a slightly negative concentration is shown as not found', async () => {
    const assay = inventedAssay({
      change: { concentration: { V2: { value: -0.004, uncertainty: 0.01 }, V3: { value: 1.6, uncertainty: 0.01 } } },
    });
    const text = visible(await assayReport(documentOf([assay]), MADE_BY));
    expect(text).toContain('not found (below 0.033)');
    expect(text).not.toContain('-0.004');
  });

  const HOSTILE = '</script><script>alert(1)</script><img src=x onerror=alert(1)>"\'&';
  test('names from outside stay text', async () => {
    const assay = inventedAssay({ sample: HOSTILE, system: HOSTILE });
    assay.findings = [{ code: 'x', severity: 'caution', message: HOSTILE, hint: HOSTILE }];
    assay.input = { ...assay.input, file: HOSTILE, column: HOSTILE };
    const html = await assayReport(documentOf([assay]), MADE_BY);
    expect(html.match(/<script/g)).toHaveLength(1);
    expect(html).not.toMatch(/<img/);
    expect(readAssayDocument(await readBack(html, 'r.html'), 'r.html').assays[0]!.sample).toBe(HOSTILE);
  });
});

describe('size and time of a report', () => {
  const many = (count: number) =>
    documentOf(
      Array.from({ length: count }, (_, i) => {
        const negative = i % 2 === 0;
        const assay = inventedAssay({
          sample: `scan ${i}`,
          side: negative ? 'negative' : 'positive',
          share: 0.01 * (i % 100),
        });
        // As many causes and findings as the engine names, with all their digits.
        assay.errorSources = Array.from({ length: 14 }, (_, k) => ({
          source: 'pattern of the standards',
          key: `pattern of the standards:scan ${i}:${k}`,
          effect: { V2: Math.sin(i + k) / 70, V3: Math.cos(i * k) / 70 },
        }));
        assay.budget = Array.from({ length: 11 }, (_, k) => ({
          source: `between preparations, number ${k}`,
          stateOfCharge: Math.abs(Math.sin(i + k)) / 130,
          totalVanadium: Math.abs(Math.cos(i + k)) / 70,
          averageOxidationState: Math.abs(Math.sin(i + k)) / 130,
        }));
        return assay;
      }),
    );

  test('a hundred spectra stay below 400 kB and are written in less than 2 s', async () => {
    const document = many(100);
    const start = performance.now();
    const html = await assayReport(document, MADE_BY);
    expect(performance.now() - start).toBeLessThan(2000);
    expect(Buffer.byteLength(html)).toBeLessThan(400_000);
  });

  test('many assays are read back with every number, without curves', async () => {
    const document = many(100);
    const read = readAssayDocument(await readBack(await assayReport(document, MADE_BY), 'r.html'), 'r.html');
    const withoutCurves = document.assays.map(({ fit, ...rest }) => {
      const { curve: _, tank: __, ...kept } = fit!;
      return { ...rest, fit: kept };
    });
    expect(read).toEqual({ ...document, assays: withoutCurves });
  });

  test('few assays keep their curves, to five digits', async () => {
    const read = readAssayDocument(await readBack(await assayReport(both, MADE_BY), 'r.html'), 'r.html');
    expect(read.assays[0]!.fit!.curve!.fitted[7]).toBe(Number(both.assays[0]!.fit!.curve!.fitted[7]!.toPrecision(5)));
    expect(read.assays[0]!.stateOfCharge).toEqual(both.assays[0]!.stateOfCharge);
  });
});

describe('reading a report back', () => {
  test.each([
    ['<html><body>nothing</body></html>', 'no-record'],
    ['<script type="application/gzip" id="tankhue-record">H4sIAAAA</script>', 'record-broken'],
    ['<script type="application/gzip" id="tankhue-record">not base64!</script>', 'record-broken'],
  ])('%s is refused', async (html, code) => {
    await expect(readBack(html, 'r.html')).rejects.toMatchObject({ code, where: 'r.html' });
  });

  test.each([
    ['{', 'json-broken'],
    ['{"schema":"tankhue/balance/1","calibration":{"name":"a","sha256":""},"assays":[]}', 'wrong-schema'],
    [JSON.stringify(both).replace('"negative"', '"left"'), 'field-wrong'],
    [JSON.stringify(both).replace('"value":1.6,', '"value":"1.6",'), 'field-wrong'],
    [JSON.stringify(both).replace('"uncertainty":0.018', '"uncertainty":-1'), 'field-wrong'],
  ])('a record of %s is refused', (json, code) => {
    expect(() => readAssayDocument(json, 'r.html')).toThrow(expect.objectContaining({ code }));
  });
});

describe('the commands', () => {
  const REFERENCE = 'calibration/reference.json';
  const simulated = () => {
    const at = folderWith({});
    tankhue('simulate', '--composition', 'V2=0.8,V3=0.8', '--path', '1mm', '--noise', '0.5mA', '--out', at('n.csv'));
    return at;
  };

  test('assay --report, then --from: the same text', () => {
    const at = simulated();
    const first = tankhue('assay', at('n.csv'), '--side', 'negative', '--path', '1mm', '--report', at('r.html'));
    expect(first.status, first.stderr).toBe(0);
    const again = tankhue('assay', '--from', at('r.html'));
    expect(again.stdout).toBe(first.stdout);
    expect(again.status).toBe(0);
  });

  test('a report never takes the place of an input', () => {
    const at = simulated();
    const before = readFileSync(at('n.csv'), 'utf8');
    const run = tankhue('assay', at('n.csv'), '--side', 'negative', '--path', '1mm', '--report', at('n.csv'));
    expect(run.status).toBe(3);
    expect(run.stderr).toContain('would-overwrite-input');
    expect(readFileSync(at('n.csv'), 'utf8')).toBe(before);
  });

  test('--from beside spectra is wrong usage', () => {
    const at = simulated();
    expect(tankhue('assay', at('n.csv'), '--from', at('r.html')).status).toBe(2);
  });

  test('calibrate --inspect --report explains the shipped calibration', () => {
    const at = folderWith({});
    const run = tankhue('calibrate', '--inspect', REFERENCE, '--report', at('c.html'));
    expect(run.status, run.stderr).toBe(0);
    expect(existsSync(at('c.html'))).toBe(true);
    expect(Buffer.byteLength(readFileSync(at('c.html')))).toBeLessThan(400_000);
  });
});
