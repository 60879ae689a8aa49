import { type Browser, type BrowserContext, chromium, type Page } from 'playwright-core';
import { findChromium } from '../../support/tools';

/** Without these, Chromium calls home at every start, which a closed network refuses many times over. */
const args = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

export async function openBrowser(): Promise<Browser> {
  const executablePath = findChromium();
  if (executablePath === null) {
    throw new Error('No Chromium was found: install Debian\'s "chromium" or set CHROMIUM_PATH.');
  }
  return chromium.launch({ executablePath, headless: true, args });
}

export interface Visit {
  context: BrowserContext;
  page: Page;
  /** What went wrong in the page so far: script errors, console errors, broken content security policy. */
  faults: string[];
}

/** A page that remembers everything that went wrong in it. */
export async function openPage(browser: Browser, url: string): Promise<Visit> {
  const context = await browser.newContext({
    baseURL: url,
    viewport: { width: 1440, height: 900 },
    locale: 'en-GB',
    timezoneId: 'UTC',
    acceptDownloads: true,
  });
  const page = await context.newPage();
  const faults: string[] = [];
  page.on('pageerror', (error) => faults.push(`error: ${error.message}`));
  page.on('console', (message) => {
    if (message.type() === 'error') faults.push(`console: ${message.text()}`);
  });
  await page.addInitScript(() => {
    document.addEventListener('securitypolicyviolation', (event) => {
      console.error(`policy: ${event.violatedDirective} ${event.blockedURI}`);
    });
  });
  return { context, page, faults };
}
