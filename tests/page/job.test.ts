import { readFileSync, statSync } from 'node:fs';
import type { Download, Page } from 'playwright-core';
import { expect, test } from 'vitest';
import { spectraCsv, spectraJcamp } from '../../src/index.ts';
import { readBack } from '../../src/report/readBack.ts';
import { folderWith, tankhue } from '../support/command.ts';
import { BENCH, describeInBrowser, drop } from './browser.ts';
import { plantFiles, REFERENCE_TEXT, spectrum } from './plantFiles.ts';

const answered = (page: Page) => page.getByText('Computed on this computer').waitFor();

async function saved(page: Page, button: string): Promise<{ name: string; text: string }> {
  const [download] = await Promise.all([
    page.waitForEvent('download'),
    page.getByRole('button', { name: button }).click(),
  ]);
  return { name: (download as Download).suggestedFilename(), text: readFileSync(await download.path(), 'utf8') };
}

/** The same fields and words; numbers to nine digits (differences of equals to 1e-11), because two engines' exp and log differ in the last of sixteen. */
function expectSame(page: unknown, command: unknown, path: string): void {
  if (typeof page === 'number' && typeof command === 'number') {
    const allowed = 1e-11 + 1e-9 * Math.abs(command);
    expect(Math.abs(page - command), `${path}: ${page} and ${command}`).toBeLessThan(allowed);
  } else if (typeof page === 'object' && page !== null && typeof command === 'object' && command !== null) {
    expect(Object.keys(page), path).toEqual(Object.keys(command));
    for (const key of Object.keys(page))
      expectSame(page[key as keyof typeof page], command[key as keyof typeof command], `${path}.${key}`);
  } else expect(page, path).toBe(command);
}

test('the page is one file below 900 kB whose policy lets nothing in and nothing out', () => {
  expect(statSync(BENCH).size).toBeLessThan(900_000);
  const policy = /http-equiv="Content-Security-Policy" content="([^"]*)"/.exec(readFileSync(BENCH, 'utf8'))![1]!;
  expect(policy).toMatch(
    /^default-src 'none'; script-src 'sha256-[^']+'; style-src 'sha256-[^']+'; worker-src blob:; base-uri 'none'; form-action 'none'$/,
  );
});

test('tankhue page writes the same bytes', () => {
  const at = folderWith({});
  expect(tankhue('page', '--out', at('bench.html')).status).toBe(0);
  expect(readFileSync(at('bench.html'), 'utf8')).toBe(readFileSync(BENCH, 'utf8'));
});

describeInBrowser('the bench page', (open) => {
  test('stands ready in less than a second after it is opened from disk', async () => {
    const times: number[] = [];
    for (let i = 0; i < 3; i++) {
      const start = performance.now();
      const { page, close } = await open(BENCH);
      await page.getByText('Choose files').waitFor();
      times.push(performance.now() - start);
      await close();
    }
    expect(Math.min(...times)).toBeLessThan(1000);
  });

  test('a script that comes in from outside does not run', async () => {
    const { page } = await open(BENCH);
    const ran = await page.evaluate(() => {
      const script = document.createElement('script');
      script.textContent = 'globalThis.cameIn = true';
      document.body.append(script);
      return 'cameIn' in globalThis;
    });
    expect(ran).toBe(false);
  });

  test('sheet and spectra dropped: the record is what the command line prints', async () => {
    const { page, close } = await open(BENCH);
    const files = plantFiles();
    await drop(page, files);
    await answered(page);
    const record = await saved(page, 'Save the record (JSON)');
    const at = folderWith(files);
    const { stdout, status } = tankhue('balance', at('tanks.csv'), '--format', 'json');
    expect(status).toBe(0);
    expect(record.name).toBe('balance.json');
    // File names are as given: bare on the page, with their folder on the command line.
    const folder = at('neg.csv').replace('neg.csv', '');
    expectSame(JSON.parse(record.text), JSON.parse(stdout.replaceAll(folder, '')), '$');
    const printed = tankhue('balance', at('tanks.csv')).stdout;
    for (const number of (await page.locator('.strip .numbers').textContent())!.match(/\d[\d.,]* ± \d[\d.]*/g)!)
      expect(printed).toContain(number);
    await close();
  });

  test('the saved report carries the record; dropped again it shows what it showed', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await answered(page);
    const report = await saved(page, 'Save the report (HTML)');
    expect(JSON.parse(await readBack(report.text, report.name)).systems[0].system).toBe('quay');
    await drop(page, { 'earlier.html': report.text });
    const section = page.locator('section', { has: page.getByRole('heading', { name: 'As read from earlier.html' }) });
    await section.getByRole('heading', { name: /quay/ }).first().waitFor();
    await close();
  });

  test('the whole job with the keyboard alone', async () => {
    const { page, close } = await open(BENCH);
    const at = folderWith({ ...plantFiles() });
    const reach = async (is: (label: string) => boolean): Promise<void> => {
      for (let i = 0; i < 120; i++) {
        await page.keyboard.press('Tab');
        const label = await page.evaluate(() => {
          const here = document.activeElement as HTMLInputElement | null;
          const text = here?.labels?.[0]?.textContent ?? here?.textContent ?? '';
          const group = here?.closest('fieldset')?.querySelector('legend')?.textContent ?? '';
          return `${group}|${text.trim()}`;
        });
        if (is(label)) return;
      }
      throw new Error('the keyboard does not reach it');
    };
    const chooser = page.waitForEvent('filechooser');
    await reach((label) => label.includes('Choose files'));
    await page.keyboard.press('Enter');
    await (await chooser).setFiles([at('neg.csv'), at('pos.csv')]);
    await page.getByText('pos.csv was read').waitFor({ state: 'attached' });
    const type = async (row: string, field: string, text: string): Promise<void> => {
      await reach((label) => label === `${row}|${field}`);
      await page.keyboard.press('Control+A');
      await page.keyboard.type(text);
    };
    await type('neg', 'Path, mm', '1');
    await type('neg', 'Volume, L', '930');
    await type('pos', 'Path, mm', '0.2');
    await type('pos', 'Volume, L', '1070');
    await page.locator('.strip').getByText('shifted and oxidised').waitFor();
    const download = page.waitForEvent('download');
    await reach((label) => label === '|Save the report (HTML)');
    await page.keyboard.press('Enter');
    expect((await download).suggestedFilename()).toBe('balance.html');
    await close();
  });

  test('ten kinds of files, each taken for what it is', async () => {
    const { page, close } = await open(BENCH);
    const one = spectrum('n', { V2: 0.7, V3: 0.85 }, 0.1);
    const csv = spectraCsv([one]);
    const table = Array.from(one.wavelength, (nm, i) => [nm, one.absorbance[i]!] as const);
    const comma = (value: number): string => value.toFixed(5).replace('.', ',');
    await drop(page, {
      'comma.csv': csv,
      'semicolon.csv': `nm;A\n${table.map(([nm, A]) => `${nm};${comma(A)}`).join('\n')}\n`,
      'tab.txt': `Instrument\tsomething\nwavelength (nm)\tabsorbance\n${[...table]
        .reverse()
        .map(([nm, A]) => `${nm}\t${A.toFixed(4)}`)
        .join('\r\n')}\r\n`,
      'jcamp.dx': spectraJcamp([one], 'a title', 'test'),
      'utf16.csv': Buffer.concat([Buffer.from([0xff, 0xfe]), Buffer.from(csv, 'utf16le')]),
      'transmittance.csv': `nm,%T\n${table.map(([nm, A]) => `${nm},${(100 * 10 ** -A).toFixed(3)}`).join('\n')}\n`,
      'calibration.json': REFERENCE_TEXT,
      'sheet.csv': plantFiles()['tanks.csv'],
      'standards.csv': 'standard,file,path_mm,V2_mol_L,V3_mol_L\nA,comma.csv,1,0.7,0.85\n',
      'picture.png': Buffer.from('89504e470d0a1a0a0000000d49484452000000010000000108060000001f15c489', 'hex'),
      'empty.csv': '',
      'words.txt': 'Dear colleague,\nthe spectra follow tomorrow.\n',
    });
    await page.getByText('words.txt cannot be read').waitFor({ state: 'attached' });
    const kinds = await page
      .locator('.files > li')
      .evaluateAll((items) =>
        items.map((item) => [item.querySelector('strong')!.textContent, item.querySelector('.badge')!.textContent]),
      );
    expect(Object.fromEntries(kinds)).toEqual({
      'comma.csv': 'spectra',
      'semicolon.csv': 'spectra',
      'tab.txt': 'spectra',
      'jcamp.dx': 'spectra',
      'utf16.csv': 'spectra',
      'transmittance.csv': 'spectra',
      'calibration.json': 'calibration',
      'sheet.csv': 'sheet',
      'standards.csv': 'standards',
      'picture.png': 'not readable',
      'empty.csv': 'not readable',
      'words.txt': 'not readable',
    });
    const refusal = page.locator('.files > li', { hasText: 'picture.png' });
    expect(await refusal.textContent()).toContain('binary');
    expect(await refusal.textContent()).toContain('Do: export');
    await close();
  });

  test('a file that can be read in two ways is refused beside the choice that decides', async () => {
    const { page, close } = await open(BENCH);
    const one = spectrum('n', { V2: 0.7, V3: 0.85 }, 0.1);
    const readings = Array.from(one.wavelength, (nm, i) => `${nm} ${one.absorbance[i]!.toFixed(3).replace('.', ',')}`);
    // In such a line the comma is a decimal mark or nothing at all can be said; the choice must help in either case.
    await drop(page, { 'odd.txt': `${readings.join('\n')}\n` });
    await page.getByText(/odd.txt (was|cannot be) read/).waitFor({ state: 'attached' });
    const item = page.locator('.files > li', { hasText: 'odd.txt' });
    if ((await item.locator('.badge').textContent()) === 'spectra')
      await item.getByText('What it was taken for').click();
    await item.getByLabel('decimal mark').selectOption('comma');
    await item.getByRole('button', { name: 'Read it again' }).click();
    await item.locator('.badge', { hasText: 'spectra' }).waitFor();
    await close();
  });

  test('numbers pasted as two columns, and as one with its axis', async () => {
    const { page, close } = await open(BENCH);
    const one = spectrum('n', { V2: 0.7, V3: 0.85 }, 0.1);
    await page.getByText('Paste numbers instead').click();
    const paste = page.getByLabel(/Numbers, as copied/);
    await paste.fill(Array.from(one.wavelength, (nm, i) => `${nm}\t${one.absorbance[i]}`).join('\n'));
    await page.getByLabel('name', { exact: true }).fill('two');
    await page.getByRole('button', { name: 'Use these numbers' }).click();
    await page.getByText('two.txt was read').waitFor({ state: 'attached' });
    await paste.fill(Array.from(one.absorbance).join('\n'));
    await page.getByLabel('first wavelength, nm').fill('430');
    await page.getByLabel('step, nm').fill('1');
    await page.getByLabel('name', { exact: true }).fill('one');
    await page.getByRole('button', { name: 'Use these numbers' }).click();
    await page.getByText('one.txt was read').waitFor({ state: 'attached' });
    await page.getByRole('group', { name: 'two' }).getByLabel('Path, mm').fill('1');
    await page.getByRole('group', { name: 'one' }).getByLabel('Path, mm').fill('1');
    await page.getByRole('group', { name: 'one' }).getByLabel('Side').selectOption('negative');
    const shown = page.locator('.row-answer');
    await expect.poll(() => shown.allTextContents().then((texts) => new Set(texts).size)).toBe(1);
    expect((await shown.allTextContents())[0]).toMatch(/charged 45\.\d+ ± .* %; V\(II\) 0\.70/);
    await close();
  });

  test('what is refused stands beside its cell, and what was entered stays', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await answered(page);
    const cell = page.getByRole('group', { name: 'N-1' }).getByLabel('Path, mm');
    await cell.fill('one');
    const said = page.getByRole('group', { name: 'N-1' }).getByText(/received "one"/);
    await said.waitFor();
    expect(await cell.inputValue()).toBe('one');
    expect(await cell.getAttribute('aria-invalid')).toBe('true');
    const describedBy = await cell.getAttribute('aria-describedby');
    expect(await page.locator(`#${describedBy}`).textContent()).toContain('received "one"');
    await cell.fill('1');
    await said.waitFor({ state: 'detached' });
    expect(await page.getByRole('group', { name: 'P-1' }).getByLabel('Path, mm').inputValue()).toBe('0.2');
    await close();
  });

  test('an unknown path is a doubt beside the path, not an error', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await answered(page);
    const row = page.getByRole('group', { name: 'N-1' });
    await row.getByLabel('Path, mm').fill('');
    await row.locator('.cell', { hasText: 'Path, mm' }).locator('.caution').waitFor();
    await close();
  });

  test('a change of path, dilution or volume moves the answer within 50 ms', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await answered(page);
    const row = page.getByRole('group', { name: 'P-1' });
    const changes = [
      ['Path, mm', '0.21'],
      ['Volume, L', '1100'],
      ['Dilution', '1.02'],
      ['Path, mm', '0.19'],
      ['Volume, L', '1050'],
      ['Path, mm', '0.2'],
      ['Dilution', '1'],
      ['Volume, L', '1070'],
      ['Path, mm', '0.205'],
    ] as const;
    const times: number[] = [];
    for (const [label, value] of changes) {
      const before = await page.locator('.strip').textContent();
      await row.getByLabel(label).fill(value);
      await expect.poll(() => page.locator('.strip').textContent()).not.toBe(before);
      const text = await page.getByText('Computed on this computer').textContent();
      times.push(Number(/in (\d+) ms/.exec(text!)![1]));
    }
    expect(times.sort((a, b) => a - b)[Math.floor(times.length / 2)]).toBeLessThan(50);
    await close();
  });

  test('survives a reload; forgets all when told to', async () => {
    const { page, close } = await open(BENCH);
    await drop(page, plantFiles());
    await answered(page);
    await page.getByRole('group', { name: 'N-1' }).getByLabel('Volume, L').fill('931');
    await page.waitForTimeout(600);
    await page.reload();
    await answered(page);
    expect(await page.getByRole('group', { name: 'N-1' }).getByLabel('Volume, L').inputValue()).toBe('931');
    expect(await page.locator('.files > li').count()).toBe(3);
    await page.getByRole('button', { name: 'Forget all' }).click();
    await page.getByRole('button', { name: 'Yes, forget all' }).click();
    await page.getByText('Waits for a spectrum').first().waitFor();
    expect(await page.evaluate(() => localStorage.length)).toBe(0);
    await page.reload();
    await page.getByText('Waits for a spectrum').first().waitFor();
    expect(await page.locator('.files > li').count()).toBe(0);
    await close();
  });

  test('works without a network', async () => {
    const { page, close } = await open(BENCH, { offline: true });
    await drop(page, plantFiles());
    await answered(page);
    await close();
  });

  test.each([
    ['Air got in over a winter', 'oxidised'],
    ['Vanadium crept through the membrane', 'vanadium has shifted'],
    ['A bubble in the cuvette', 'undecided'],
  ])('the invented plant “%s” is %s, as it says', async (title, verdict) => {
    const { page, close } = await open(BENCH);
    await page.getByRole('button', { name: title }).click();
    await page.locator('.strip').getByText(verdict, { exact: true }).waitFor();
    await close();
  });

  test('standards dropped become a calibration that is validated, used and saved', async () => {
    const { page, close } = await open(BENCH);
    const series = [1, 1.4].flatMap((total, t) =>
      [0, 0.25, 0.5, 0.75, 1].map((share, i) => ({
        name: `S${t}${i}`,
        V2: total * (1 - share),
        V3: total * share,
        preparation: `batch ${t}`,
      })),
    );
    const sheet = [
      'standard,file,column,path_mm,V2_mol_L,V3_mol_L,preparation',
      ...series.map(
        ({ name, V2, V3, preparation }) => `${name},standards-spectra.csv,${name},1,${V2},${V3},${preparation}`,
      ),
      '',
    ].join('\n');
    const spectra = series.map(({ name, V2, V3 }, i) => spectrum(name, { V2, V3 }, 0.1, i + 10));
    await drop(page, {
      'own.csv': sheet,
      'standards-spectra.csv': spectraCsv(spectra as [(typeof spectra)[0], ...typeof spectra]),
    });
    await page.getByText('standards-spectra.csv was read').waitFor({ state: 'attached' });
    await page.getByRole('button', { name: 'Build a calibration from it' }).click();
    await page
      .getByRole('heading', { name: 'Does it get standards right that it has not seen?' })
      .waitFor({ timeout: 50_000 });
    expect(await page.getByLabel('in use').inputValue()).toBe('own-calibration.json');
    const file = await saved(page, 'Save this calibration (JSON)');
    const at = folderWith({ 'own.json': file.text });
    expect(tankhue('calibrate', '--inspect', at('own.json')).status).toBe(0);
    await close();
  });
});
