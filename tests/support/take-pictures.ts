import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import type { Page } from 'playwright-core';
import { openBrowser, openPage } from '../e2e/support/browser';
import { chooseStudy, openSample, openSamples, saveAs, signIn, waitUntilDone } from '../e2e/support/person';
import { root, startBuiltServer } from '../e2e/support/server';

/**
 * `npm run pictures`: the README's screenshots, from the built server and the samples. `npm run pictures -- FOLDER` takes
 * every screen in both themes at two sizes instead, to be looked at.
 */
const everywhere = process.argv[2];
const folder = everywhere ?? join(root, 'samples/pictures');

const sizes = [
  { width: 1440, height: 900 },
  { width: 1920, height: 1080 },
];

async function setTheme(page: Page, theme: 'bench' | 'projector'): Promise<void> {
  const now = await page.evaluate(() => document.documentElement.dataset.theme);
  const toggle = page.getByRole('button', { name: /theme/i }).first();
  // Behind an open dialog the toggle cannot be reached; its colours follow the attribute alone.
  if (now !== theme && (await page.getByRole('dialog').isVisible())) {
    await page.evaluate((wanted) => {
      document.documentElement.dataset.theme = wanted;
    }, theme);
  } else if (now !== theme) await toggle.click();
  await page.waitForFunction((wanted) => document.documentElement.dataset.theme === wanted, theme);
}

async function shoot(page: Page, name: string): Promise<void> {
  // Fonts and the last redraw.
  await page.evaluate(() => document.fonts.ready.then(() => undefined));
  await page.waitForTimeout(300);
  if (everywhere === undefined) return;
  for (const theme of ['bench', 'projector'] as const) {
    await setTheme(page, theme);
    for (const size of sizes) {
      await page.setViewportSize(size);
      await page.waitForTimeout(400);
      await page.screenshot({ path: join(folder, `${name}-${theme}-${size.width}.png`) });
    }
  }
  await setTheme(page, 'bench');
  await page.setViewportSize(sizes[0]!);
}

async function keep(page: Page, name: string): Promise<void> {
  if (everywhere !== undefined) return;
  await page.waitForTimeout(500);
  await page.screenshot({ path: join(folder, `${name}.png`) });
  console.log(`samples/pictures/${name}.png`);
}

async function tour(page: Page): Promise<void> {
  await page.goto('/');
  await page.getByRole('button', { name: 'Use the demo sign-in' }).waitFor();
  await shoot(page, 'sign-in');
  await signIn(page);
  await shoot(page, 'home-fresh');
  await openSamples(page);
  await waitUntilDone(page);
  await shoot(page, 'witness');
  await keep(page, 'witness-bench');
  await page
    .getByRole('button', { name: /Edit the reading/ })
    .first()
    .click();
  await page.getByRole('dialog').waitFor();
  await shoot(page, 'reading');
  await keep(page, 'reading-dialog');
  await page.keyboard.press('Escape');
  await saveAs(page, 'result', 'Witness, first night');
  await saveAs(page, 'session', 'First night');
  await chooseStudy(page, 'Joint map');
  await waitUntilDone(page);
  await shoot(page, 'joint-map');
  await chooseStudy(page, 'Delay');
  await waitUntilDone(page);
  await shoot(page, 'delay');
  if (everywhere === undefined) await setTheme(page, 'projector');
  await keep(page, 'delay-projector');
  if (everywhere === undefined) await setTheme(page, 'bench');
  await openSample(page, /ghost image/);
  await shoot(page, 'ghost-image');
  await keep(page, 'ghost-image-bench');
  await openSample(page, /witness from frames/);
  await shoot(page, 'witness-frames');
  await page.goto('/');
  await page.getByRole('link', { name: /Witness, first night/ }).waitFor();
  await shoot(page, 'home');
  await page.getByRole('link', { name: /Witness, first night/ }).click();
  await page.locator('[data-map]').first().waitFor();
  await shoot(page, 'result');
  await page.goto('/results');
  await page.getByRole('link', { name: /Witness, first night/ }).waitFor();
  await shoot(page, 'results');
  await page.goto('/presets');
  await page
    .getByRole('link', { name: /witness from tags/ })
    .first()
    .waitFor();
  await shoot(page, 'presets');
  await page
    .getByRole('link', { name: /witness from tags/ })
    .first()
    .click();
  await page.getByRole('heading', { name: /witness from tags/ }).waitFor();
  await shoot(page, 'preset');
  await page.goto('/bench');
  await page.getByRole('button', { name: 'Open files' }).first().waitFor();
  await shoot(page, 'bench-empty');
}

mkdirSync(folder, { recursive: true });
const server = await startBuiltServer();
const browser = await openBrowser();
try {
  const { page } = await openPage(browser, server.url);
  await tour(page);
} finally {
  await browser.close();
  await server.close();
}
