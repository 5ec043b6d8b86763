import { spawnSync } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { assayReport } from '../../src/report/makeReport.ts';
import { documentOf, inventedAssay, withheldAssay } from '../report/inventedResults.ts';
import { folderWith, tankhue } from '../support/command.ts';
import { describeInBrowser } from './browser.ts';
import { plantFiles } from './plantFiles.ts';

const hasPoppler = spawnSync('pdftotext', ['-v']).error === undefined;
const squeezed = (text: string): string => text.replace(/\s+/g, '');
const pagesIn = process.env['TANKHUE_SCREENSHOTS'];

describeInBrowser(`printing${hasPoppler ? '' : ' (needs poppler, which is missing)'}`, (open) => {
  test.skipIf(!hasPoppler).each([
    ['A4', 'balance.html'],
    ['Letter', 'balance.html'],
    ['A4', 'calibration.html'],
    ['Letter', 'calibration.html'],
    ['A4', 'assay.html'],
  ] as const)('on %s: no picture of %s is cut by the end of a page', async (format, name) => {
    const at = folderWith(plantFiles());
    if (name === 'balance.html') tankhue('balance', at('tanks.csv'), '--report', at(name));
    if (name === 'calibration.html')
      tankhue('calibrate', '--inspect', 'calibration/reference.json', '--report', at(name));
    if (name === 'assay.html') {
      const assays = [inventedAssay(), withheldAssay({ sample: 'P-1', side: 'positive', share: 0.6 })];
      writeFileSync(at(name), await assayReport(documentOf(assays), 'tankhue test'));
    }
    const { page, close } = await open(at(name));
    const pictures = await page.locator('figure').evaluateAll((figures) =>
      figures.map((figure) => {
        const texts = [...figure.querySelectorAll('svg text')];
        return { question: figure.querySelector('h3')!.textContent!, last: texts.at(-1)!.textContent! };
      }),
    );
    await page.pdf({ path: at('print.pdf'), format });
    await close();
    if (pagesIn) spawnSync('pdftoppm', ['-r', '60', '-png', at('print.pdf'), `${pagesIn}/${name}-${format}`]);
    const { stdout } = spawnSync('pdftotext', ['-layout', at('print.pdf'), '-'], { encoding: 'utf8' });
    const sheets = stdout.split('\f').map(squeezed);
    expect(sheets.length).toBeGreaterThan(2);
    expect(pictures.length).toBeGreaterThan(2);
    for (const { question, last } of pictures)
      expect(
        sheets.some((sheet) => sheet.includes(squeezed(question)) && sheet.includes(squeezed(last))),
        `“${question}” with “${last}” on one page`,
      ).toBe(true);
  });
});
