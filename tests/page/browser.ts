import { existsSync } from 'node:fs';
import { resolve } from 'node:path';
import { pathToFileURL } from 'node:url';
import { chromium, type Browser, type BrowserContextOptions, type Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect } from 'vitest';

const CHROMIUM = '/usr/bin/chromium';
const hasBrowser = existsSync(CHROMIUM);

/** A group of tests in a real browser; where there is none they are skipped, and their title says why. */
export const describeInBrowser = (title: string, tests: (open: OpenPage) => void): void => {
  describe.skipIf(!hasBrowser)(`${title} (in Chromium; skipped where ${CHROMIUM} is missing)`, () => {
    let browser: Browser;
    beforeAll(async () => {
      browser = await chromium.launch({
        executablePath: CHROMIUM,
        args: [
          '--no-sandbox',
          '--disable-gpu',
          '--no-first-run',
          '--disable-background-networking',
          '--disable-component-update',
          '--disable-sync',
        ],
      });
    });
    afterAll(() => browser?.close());
    tests((file, options) => opened(browser, file, options));
  });
};

export type OpenPage = (file: string, options?: BrowserContextOptions) => Promise<WatchedPage>;

export interface WatchedPage {
  readonly page: Page;
  /** fails if the page said a word in its console, threw, or asked for anything that is not this file or its own worker */
  readonly close: () => Promise<void>;
}

async function opened(browser: Browser, file: string, options: BrowserContextOptions = {}): Promise<WatchedPage> {
  const context = await browser.newContext({ viewport: { width: 1100, height: 900 }, ...options });
  const page = await context.newPage();
  const said: string[] = [];
  page.on('console', (message) => said.push(`console ${message.type()}: ${message.text()}`));
  page.on('pageerror', (error) => said.push(`error: ${error.stack ?? error.message}`));
  page.on('request', (request) => {
    if (!/^(file|blob|data):/.test(request.url())) said.push(`request: ${request.url()}`);
  });
  await page.goto(pathToFileURL(resolve(file)).href);
  return {
    page,
    close: async () => {
      await context.close();
      expect(said, 'words, errors and requests of the page').toEqual([]);
    },
  };
}

export const BENCH = 'dist/page/tankhue.html';

/** Drops files on the page as a hand does. */
export async function drop(page: Page, files: Readonly<Record<string, string | Uint8Array>>): Promise<void> {
  const plain = Object.entries(files).map(
    ([name, content]) => [name, Buffer.from(content).toString('base64')] as const,
  );
  const transfer = await page.evaluateHandle((list) => {
    const data = new DataTransfer();
    for (const [name, base64] of list)
      data.items.add(new File([Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0))], name));
    return data;
  }, plain);
  await page.dispatchEvent('body', 'drop', { dataTransfer: transfer });
}
