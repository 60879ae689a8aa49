import type { Page } from 'playwright-core';
import { expect } from 'vitest';

/** What a person does on the page, in their own words. */

export async function signIn(page: Page): Promise<void> {
  await page.goto('/');
  await page.getByRole('button', { name: 'Use the demo sign-in' }).click();
  await page.getByText('Open the samples').waitFor();
}

export async function openSamples(page: Page): Promise<void> {
  await page.getByText('Open the samples').click();
}

/** One of the samples below the first; presets of the same name stand beside them and open without files. */
export async function openSample(page: Page, name: RegExp): Promise<void> {
  await page.goto('/');
  await page.getByRole('list', { name: 'Other samples' }).getByRole('link', { name }).click();
  await waitUntilDone(page);
}

/** Opens files of one's own through the button on the shelf. */
export async function openFiles(page: Page, paths: readonly string[]): Promise<void> {
  const chooser = page.waitForEvent('filechooser');
  await page.getByRole('button', { name: 'Open files' }).first().click();
  await (await chooser).setFiles([...paths]);
}

/** Waits until the study on the stage has run to its end. */
export async function waitUntilDone(page: Page): Promise<void> {
  await page.getByText(/^done in /).waitFor({ timeout: 120_000 });
}

export async function chooseStudy(page: Page, name: string): Promise<void> {
  await page.getByRole('tab', { name }).click();
}

export async function saveAs(page: Page, what: 'result' | 'session' | 'preset', name: string): Promise<void> {
  if (what === 'result') {
    await page.getByRole('button', { name: 'Save result' }).click();
  } else {
    await page.getByRole('button', { name: 'Save …' }).click();
    const item = what === 'session' ? 'Save session' : 'Save as preset';
    await page.getByRole('menuitem', { name: item, exact: true }).click();
  }
  await page.getByLabel('Name').fill(name);
  await page.getByRole('dialog').getByRole('button', { name: 'Save', exact: true }).click();
  await page.getByTestId('save-status').getByRole('link', { name }).waitFor();
}

/** Cells of a row of the ledger's quantities, e.g. of "reid.x". */
export async function quantityRow(page: Page, id: string): Promise<string> {
  const row = page.locator(`[data-quantity="${id}"]`).first();
  await row.waitFor();
  return (await row.getByRole('cell').allTextContents()).join(' | ');
}

/** The stored result of an address such as /results/ID, maps still as addresses. */
export async function fetchResult(page: Page, id: string): Promise<unknown> {
  return page.evaluate(async (resultId) => {
    const me = await (await fetch('/api/me')).json();
    return (await fetch(`/api/groups/${me.groups[0].id}/results/${resultId}`)).json();
  }, id);
}

export async function savedResultId(page: Page, name: string): Promise<string> {
  const href = await page.getByTestId('save-status').getByRole('link', { name }).getAttribute('href');
  const id = /\/results\/([^/?]+)/.exec(href ?? '')?.[1];
  expect(id, `address of the result ${name}`).toBeDefined();
  return id!;
}

/** A page nobody is signed in on yet is told so by the server; Chromium logs that as an error. */
export function withoutSignInNotice(faults: readonly string[]): string[] {
  return faults.filter((fault) => !fault.includes('401 (Unauthorized)'));
}
