import { readFileSync } from 'node:fs';
import type { Page } from 'playwright-core';
import { expect, test } from 'vitest';
import { spectraCsv } from '../../src/index.ts';
import { BENCH, describeInBrowser, drop } from './browser.ts';
import { plantFiles, spectrum } from './plantFiles.ts';

/** Longest time, ms, in which the page drew nothing, since `watchFrames` was called. */
const watchFrames = (page: Page): Promise<void> =>
  page.evaluate(() => {
    const watch = { last: performance.now(), longest: 0 };
    (globalThis as { watch?: typeof watch }).watch = watch;
    const tick = (): void => {
      const now = performance.now();
      watch.longest = Math.max(watch.longest, now - watch.last);
      watch.last = now;
      requestAnimationFrame(tick);
    };
    requestAnimationFrame(tick);
  });
const longestFrame = (page: Page): Promise<number> =>
  page.evaluate(() => (globalThis as unknown as { watch: { longest: number } }).watch.longest);

/** 5,000 spectra, every so many nanometres; 4 MB at 5 nm. */
function manySpectra(every = 5): string {
  const one = spectrum('n', { V4: 0.7, V5: 0.95 }, 0.02);
  const names = Array.from({ length: 5000 }, (_, i) => `s${i}`);
  const lines = [`nm,${names.join(',')}`];
  for (let l = 0; l < one.wavelength.length; l += every)
    lines.push(
      `${one.wavelength[l]},${names.map((_, i) => (one.absorbance[l]! * (1 + (i % 7) / 1000)).toFixed(4)).join(',')}`,
    );
  return `${lines.join('\n')}\n`;
}

describeInBrowser('rough input on the bench page', (open) => {
  test('a file of 5,000 spectra is read and its assay begun and cancelled without a frozen page', async () => {
    const { page, close } = await open(BENCH);
    const many = manySpectra();
    await page
      .locator('.file-input')
      .setInputFiles({ name: 'many.csv', mimeType: 'text/csv', buffer: Buffer.from(many) });
    await watchFrames(page);
    await page.getByText('many.csv was read').waitFor({ state: 'attached', timeout: 30_000 });
    await page.getByText('Assay all 5,000 spectra of it as one side').click();
    const form = page.locator('.files form', { hasText: 'Assay all' });
    await form.getByLabel('path, mm').fill('0.2');
    await form.getByRole('button', { name: 'Assay all' }).click();
    const bar = page.getByLabel('assaying many.csv');
    await expect
      .poll(() => bar.evaluate((element) => (element as HTMLProgressElement).value), { timeout: 40_000 })
      .toBeGreaterThan(0.01);
    // Work goes on meanwhile: a row can be typed.
    await page.getByLabel('Sample').first().fill('typed while it computes');
    await page.getByRole('button', { name: 'Cancel' }).click();
    await page.getByText('cancelled: assaying many.csv').waitFor({ state: 'attached' });
    expect(await bar.count()).toBe(0);
    expect(await longestFrame(page)).toBeLessThan(400);
    await close();
  });

  test('reading a large file can be cancelled; what was read before stays', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await page.getByText('Computed on this computer').waitFor();
    const large = manySpectra(1);
    await page
      .locator('.file-input')
      .setInputFiles({ name: 'large.csv', mimeType: 'text/csv', buffer: Buffer.from(large) });
    await page.getByRole('button', { name: 'Cancel reading' }).click();
    await page.getByText('cancelled: large.csv').waitFor({ state: 'attached' });
    await page.getByRole('group', { name: 'N-1' }).getByLabel('Volume, L').fill('900');
    await page.locator('.strip', { hasText: /usable/ }).waitFor();
    expect(await page.locator('.files > li').count()).toBe(3);
    await close();
  });

  test('markup in names of files, columns and samples stays text', async () => {
    const { page, close } = await open(BENCH);
    const evil = '<script>alert(1)</script><img src=x onerror=alert(2)>';
    const csv = spectraCsv([spectrum(evil, { V2: 0.7, V3: 0.85 }, 0.1)]);
    await drop(page, { [`neg${evil.replaceAll('/', '')}.csv`]: csv });
    await page.getByText('was read').waitFor({ state: 'attached' });
    await page.getByLabel('Sample').first().fill(evil);
    await page.getByLabel('Path, mm').first().fill('1');
    await page.getByRole('heading', { name: evil }).waitFor();
    expect(await page.locator('img, main script').count()).toBe(0);
    await close();
  });

  test('a cell that a spreadsheet would run as a formula is disarmed in the saved sheet', async () => {
    const { page, close } = await open(BENCH);
    const formula = '=HYPERLINK("http://example.org","click")';
    await page.getByLabel('Sample').first().fill(formula);
    const [download] = await Promise.all([
      page.waitForEvent('download'),
      page.getByRole('button', { name: 'Save the sheet (CSV)' }).click(),
    ]);
    const text = readFileSync(await download.path(), 'utf8');
    expect(text).toContain(`"'=HYPERLINK(""http://example.org"",""click"")"`);
    expect(text).not.toMatch(/(^|,|")=HYPERLINK/m);
    await close();
  });

  test('a cell of 10 MB is refused or taken, and the page goes on', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await page.getByText('Computed on this computer').waitFor();
    await watchFrames(page);
    const cell = page.getByRole('group', { name: 'N-1' }).getByLabel('Path, mm');
    await cell.evaluate((element) => {
      const input = element as HTMLInputElement;
      input.value = '7'.repeat(10_000_000);
      input.dispatchEvent(new Event('input', { bubbles: true }));
    });
    await page.getByRole('group', { name: 'N-1' }).locator('.beside.withhold').first().waitFor({ timeout: 20_000 });
    await cell.fill('1');
    await page.locator('.strip', { hasText: /usable/ }).waitFor();
    await close();
  });

  test('a sheet with a cell of 10 MB is read', async () => {
    const { page, close } = await open(BENCH);
    const files = plantFiles();
    await drop(page, {
      ...files,
      'tanks.csv': files['tanks.csv']
        .split('\n')
        .map((line, i) => (line === '' ? '' : `${line},${i === 0 ? 'note' : i === 1 ? 'x'.repeat(10_000_000) : ''}`))
        .join('\n'),
    });
    await page.locator('.strip', { hasText: /usable/ }).waitFor({ timeout: 30_000 });
    await close();
  });
});
