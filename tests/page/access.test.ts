import { readFileSync, writeFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { Page } from 'playwright-core';
import { expect, test } from 'vitest';
import { DARK, LIGHT, TEXT_ON_GROUND } from '../../src/report/palette.ts';
import { assayReport } from '../../src/report/makeReport.ts';
import { documentOf, inventedAssay, withheldAssay } from '../report/inventedResults.ts';
import { folderWith, tankhue } from '../support/command.ts';
import { BENCH, describeInBrowser, drop } from './browser.ts';
import { plantFiles } from './plantFiles.ts';

const AXE = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/** Faults of the accessibility rules, serious and critical ones. */
async function seriousFaults(page: Page): Promise<string[]> {
  await page.evaluate(AXE);
  return page.evaluate(async () => {
    const { axe } = globalThis as unknown as {
      axe: { run: () => Promise<{ violations: { id: string; impact: string; nodes: { html: string }[] }[] }> };
    };
    const { violations } = await axe.run();
    return violations
      .filter(({ impact }) => impact === 'serious' || impact === 'critical')
      .map(({ id, nodes }) => `${id}: ${nodes.map(({ html }) => html.slice(0, 160)).join(' | ')}`);
  });
}

/** Every pair of text colour and ground that a person sees on the page, as `#rrggbb on #rrggbb`. */
const pairsSeen = (page: Page): Promise<string[]> =>
  page.evaluate(() => {
    const hex = (css: string): string => {
      const [r, g, b] = css.match(/[\d.]+/g)!.map(Number);
      return `#${[r!, g!, b!].map((v) => Math.round(v).toString(16).padStart(2, '0')).join('')}`;
    };
    const isClear = (css: string): boolean => css === 'transparent' || css.endsWith(', 0)');
    const groundOf = (element: Element | null): string => {
      for (let here = element; here; here = here.parentElement) {
        const { backgroundColor } = getComputedStyle(here);
        if (!isClear(backgroundColor)) return hex(backgroundColor);
      }
      return '#ffffff';
    };
    const seen = new Set<string>();
    const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
    while (walker.nextNode()) {
      const element = walker.currentNode.parentElement!;
      if (
        !walker.currentNode.textContent!.trim() ||
        ['SCRIPT', 'STYLE', 'NOSCRIPT', 'OPTION'].includes(element.tagName)
      )
        continue;
      const style = getComputedStyle(element);
      seen.add(`${hex(element instanceof SVGElement ? style.fill : style.color)} on ${groundOf(element)}`);
    }
    return [...seen];
  });

const permitted = (colours: Readonly<Record<string, string>>): string[] =>
  TEXT_ON_GROUND.map(([text, ground]) => `${colours[text]} on ${colours[ground]}`);

const shots = process.env['TANKHUE_SCREENSHOTS'];

describeInBrowser('access and contrast', (open) => {
  test.each(['light', 'dark'] as const)(
    'the bench page, %s: no serious fault, only computed colour pairs',
    async (colorScheme) => {
      const { page } = await open(BENCH, { colorScheme });
      const colours = colorScheme === 'light' ? LIGHT : DARK;
      const check = async (state: string): Promise<void> => {
        if (shots)
          await page.screenshot({
            path: `${shots}/page-${state.replaceAll(' ', '-')}-${colorScheme}.png`,
            fullPage: true,
          });
        expect(await seriousFaults(page), state).toEqual([]);
        for (const pair of await pairsSeen(page)) expect(permitted(colours), `${state}: ${pair}`).toContain(pair);
      };
      await check('first use');
      await page.getByRole('button', { name: 'A bubble in the cuvette' }).click();
      await page.getByText('Computed on this computer').waitFor();
      await check('withheld');
      await page.getByRole('button', { name: 'Air got in over a winter' }).click();
      await page.locator('.strip').getByText('oxidised', { exact: true }).waitFor();
      await page
        .locator('details')
        .evaluateAll((all) => all.forEach((one) => ((one as HTMLDetailsElement).open = true)));
      await check('answered and unfolded');
      await drop(page, { 'broken.csv': 'nothing of use\n' });
      await page.getByText('broken.csv cannot be read').waitFor({ state: 'attached' });
      await page.getByLabel('Path, mm').first().fill('x');
      await page.locator('.beside.withhold').first().waitFor();
      await page.getByRole('button', { name: 'Look into it' }).click();
      await page.getByRole('heading', { name: 'Which standard should be made again?' }).waitFor();
      await page.getByRole('button', { name: 'Forget all' }).click();
      await check('refused, inspected, asking');
    },
  );

  const reportFiles = async (): Promise<Record<string, string>> => {
    const at = folderWith(plantFiles());
    tankhue('balance', at('tanks.csv'), '--report', at('balance.html'));
    tankhue('calibrate', '--inspect', 'calibration/reference.json', '--report', at('calibration.html'));
    const assays = [inventedAssay(), withheldAssay({ sample: 'P-1', side: 'positive', share: 0.6 })];
    writeFileSync(at('assay.html'), await assayReport(documentOf(assays), 'tankhue test'));
    return Object.fromEntries(['balance.html', 'calibration.html', 'assay.html'].map((name) => [name, at(name)]));
  };

  test.each(['light', 'dark'] as const)(
    'reports, %s: no serious fault, only computed colour pairs',
    async (colorScheme) => {
      for (const [name, file] of Object.entries(await reportFiles())) {
        const { page, close } = await open(file, { colorScheme });
        if (shots) await page.screenshot({ path: `${shots}/${name}-${colorScheme}.png`, fullPage: true });
        const colours = colorScheme === 'light' ? LIGHT : DARK;
        for (const pair of await pairsSeen(page)) expect(permitted(colours), `${name}: ${pair}`).toContain(pair);
        await page
          .locator('details')
          .evaluateAll((all) => all.forEach((one) => ((one as HTMLDetailsElement).open = true)));
        expect(await seriousFaults(page), name).toEqual([]);
        await close();
      }
    },
  );
});
