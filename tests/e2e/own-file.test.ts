import { execFileSync } from 'node:child_process';
import { join } from 'node:path';
import type { Locator } from 'playwright-core';
import { afterAll, beforeAll, expect, it } from 'vitest';
import { resultRowSchema } from '../../shared/contracts/http';
import { mapFileSchema } from '../../shared/contracts/result';
import { decodeMap } from '../../shared/contracts/result-codec';
import { z } from '../../shared/util/zod';
import { findPythonWithH5py } from '../support/tools';
import {
  chooseStudy,
  fetchResult,
  openFiles,
  saveAs,
  savedResultId,
  signIn,
  waitUntilDone,
  withoutSignInNotice,
} from './support/person';
import { openScene, type Scene } from './support/scene';
import { root } from './support/server';

/** A file the user brings: written by h5py, named by nobody here, mapped through the reading dialog. */
let scene: Scene;

beforeAll(async () => {
  scene = await openScene();
});
afterAll(() => scene.close());

const truthSchema = z.object({
  tickPs: z.number(),
  jointX: z.array(z.number()),
  jointY: z.array(z.number()),
});

async function fillArm(dialog: Locator, arm: string, firstChannel: number): Promise<void> {
  const part = dialog.getByRole('group', { name: new RegExp(arm) });
  const present = part.getByRole('switch', { name: new RegExp(`${arm} array`) });
  if ((await present.getAttribute('aria-checked')) !== 'true') await present.click();
  const fields = [
    ['First channel', firstChannel],
    ['Width', 4],
    ['Height', 4],
    ['Pixel pitch', 50],
  ] as const;
  for (const [label, value] of fields) {
    await part.getByLabel(label).fill(String(value));
    await part.getByLabel(label).blur();
  }
}

async function choose(dialog: Locator, label: string, option: string | RegExp): Promise<void> {
  await dialog.getByLabel(label, { exact: true }).click();
  await scene.page.getByRole('option', { name: option }).first().click();
}

it('gives the map that was put into the file', async () => {
  const python = findPythonWithH5py();
  expect(python, 'install python3-h5py').not.toBeNull();
  const path = join(scene.dir, 'night-12.h5');
  const printed = execFileSync(python!, [join(root, 'tests/e2e/support/own-file.py'), path], {
    encoding: 'utf8',
  });
  const truth = truthSchema.parse(JSON.parse(printed));

  const { page } = scene;
  await signIn(page);
  await page.getByRole('link', { name: 'Bench', exact: true }).click();
  await openFiles(page, [path]);
  const card = page.getByRole('listitem', { name: 'night-12.h5' });
  await card.getByRole('button', { name: /Edit the reading/ }).click();
  const dialog = page.getByRole('dialog');
  await choose(dialog, 'Times', /clicks.*stamp/);
  await choose(dialog, 'Channels', /clicks.*line/);
  await dialog.getByLabel('Tick length').fill(String(truth.tickPs));
  await dialog.getByLabel('Tick length').blur();
  await fillArm(dialog, 'signal', 100);
  await fillArm(dialog, 'idler', 300);
  await choose(dialog, 'Plane', /near field/);
  await dialog.getByLabel('Magnification', { exact: true }).fill('1');
  await dialog.getByLabel(/uncertainty of Magnification/).fill('0.01');
  await dialog.getByLabel(/uncertainty of Magnification/).blur();
  await dialog
    .getByText('12 000')
    .or(dialog.getByText(/12.000 records|12\.00? k records|12 k records/))
    .first()
    .waitFor();
  await dialog.getByRole('button', { name: 'Apply' }).click();
  await dialog.waitFor({ state: 'detached' });

  await chooseStudy(page, 'Joint map');
  await waitUntilDone(page);
  await saveAs(page, 'result', 'Own file');
  const { result } = resultRowSchema.parse(await fetchResult(page, await savedResultId(page, 'Own file')));
  expect(result.provenance.inputs[0]?.layout).toMatchObject({
    time: { dataset: '/night 12/clicks', field: 'stamp' },
    channel: { dataset: '/night 12/clicks', field: 'line' },
    tickFs: truth.tickPs * 1000,
  });
  const counts = async (id: string): Promise<number[]> => {
    const address = result.maps[id]?.file;
    const file = mapFileSchema.parse(await page.evaluate(async (url) => (await fetch(url!)).json(), address));
    return [...decodeMap(file).data];
  };
  // The window keeps about 95 % of the pairs; the map may lose pairs in proportion but never move one.
  const x = await counts('joint.x.raw');
  const kept = x.reduce((sum, value) => sum + value, 0) / 6000;
  expect(kept).toBeGreaterThan(0.93);
  expect(kept).toBeLessThanOrEqual(1);
  for (const [id, expected] of [
    ['joint.x.raw', truth.jointX],
    ['joint.y.raw', truth.jointY],
  ] as const) {
    const found = await counts(id);
    expect(found.length).toBe(16);
    found.forEach((value, i) => {
      if (expected[i] === 0) expect(value, `${id} ${i}`).toBe(0);
      // Binomial thinning: five standard deviations.
      const mean = expected[i]! * kept;
      expect(Math.abs(value - mean), `${id} ${i}`).toBeLessThan(5 * Math.sqrt(mean * (1 - kept)) + 1e-9);
    });
  }
  expect(withoutSignInNotice(scene.faults)).toEqual([]);
});
