import { copyFileSync, readFileSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  chooseStudy,
  openFiles,
  openSample,
  openSamples,
  quantityRow,
  signIn,
  waitUntilDone,
  withoutSignInNotice,
} from './support/person';
import { openScene, type Scene } from './support/scene';

/** The bench under the hand: bad files beside good ones, the brush, the slice, undo, cancel. */
let scene: Scene;
let page: Page;

beforeAll(async () => {
  scene = await openScene();
  page = scene.page;
  await signIn(page);
  await openSamples(page);
  await waitUntilDone(page);
});
afterAll(() => scene.close());

describe('bad input', () => {
  const path = (name: string): string => join(scene.dir, name);
  const cases: [string, () => void, RegExp][] = [
    ['empty.h5', () => writeFileSync(path('empty.h5'), ''), /no bytes|empty/],
    ['notes.h5', () => writeFileSync(path('notes.h5'), 'time,channel\n12,3\n15,4\n'), /text/],
    [
      'cut.h5',
      () => {
        copyFileSync('samples/near-tags.h5', path('cut.h5'));
        truncateSync(path('cut.h5'), 1_000_000);
      },
      /cut|truncated|ends/,
    ],
    [
      'odd.bin',
      () => {
        copyFileSync('samples/near-tags.bin', path('odd.bin'));
        truncateSync(path('odd.bin'), readFileSync(path('odd.bin')).length - 1);
      },
      /whole records|byte/,
    ],
  ];

  it.each(cases)(
    '%s gets a sentence with the place and the way out, and nothing else changes',
    async (name, make, sentence) => {
      make();
      const before = await quantityRow(page, 'reid.x');
      await openFiles(page, [path(name)]);
      const card = page.getByRole('listitem', { name, exact: true });
      await card.getByText(sentence).first().waitFor();
      expect(await card.textContent()).toContain(name);
      expect(await quantityRow(page, 'reid.x')).toBe(before);
      await card.getByRole('button', { name: `Remove ${name}` }).click();
      await card.waitFor({ state: 'detached' });
      expect(await quantityRow(page, 'reid.x')).toBe(before);
    },
  );
});

describe('the plots are instruments', () => {
  it('brushes the window on the delay histogram, and undoes it', async () => {
    await chooseStudy(page, 'Delay');
    await waitUntilDone(page);
    const before = await quantityRow(page, 'window.width');
    const edge = page.getByRole('slider', { name: /window, end/ }).first();
    await edge.focus();
    await page.keyboard.press('Shift+ArrowRight');
    await expect.poll(() => quantityRow(page, 'window.width'), { timeout: 30_000 }).not.toBe(before);
    await waitUntilDone(page);
    await page.getByRole('button', { name: /Undo/ }).click();
    await expect.poll(() => quantityRow(page, 'window.width'), { timeout: 30_000 }).toBe(before);
  });

  it('drags the window with the mouse', async () => {
    await waitUntilDone(page);
    const before = await quantityRow(page, 'coincidences');
    const edge = await page
      .getByRole('slider', { name: /window, end/ })
      .first()
      .boundingBox();
    expect(edge).not.toBeNull();
    const y = edge!.y + edge!.height / 2;
    const x = edge!.x + edge!.width / 2;
    await page.mouse.move(x, y);
    await page.mouse.down();
    await page.mouse.move(x - 3, y, { steps: 3 });
    await page.mouse.up();
    await expect.poll(() => quantityRow(page, 'coincidences'), { timeout: 30_000 }).not.toBe(before);
  });

  it('gives the conditional slice of a clicked joint map', async () => {
    await chooseStudy(page, 'Joint map');
    await waitUntilDone(page);
    const map = page.locator('[data-map^="joint.x"]').first();
    await map.scrollIntoViewIfNeeded();
    const plot = await map.getByRole('application').first().boundingBox();
    expect(plot).not.toBeNull();
    await page.mouse.click(plot!.x + plot!.width * 0.5, plot!.y + plot!.height * 0.45);
    const slice = page.getByRole('region', { name: 'Conditional slice' });
    await slice.waitFor();
    expect(await slice.textContent()).toMatch(/pairs/);
  });

  it('shows the stencil in the ghost image of its sample', async () => {
    await openSample(page, /ghost image/);
    await page.locator('[data-map^="image"]').first().waitFor();
    expect(await quantityRow(page, 'visibility')).toMatch(/0\.\d+\(\d+\)/);
  });

  it('reads camera frames as well', async () => {
    await openSample(page, /witness from frames/);
    expect(await quantityRow(page, 'reid.x')).toMatch(/0\.0\d+\(\d+\)/);
  });
});

it('met no script error, no console error and no broken content security policy', () => {
  expect(withoutSignInNotice(scene.faults)).toEqual([]);
});
