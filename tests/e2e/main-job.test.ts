import AxeBuilder from '@axe-core/playwright';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { resultRowSchema } from '../../shared/contracts/http';
import { type ResultFile, resultFileSchema } from '../../shared/contracts/result';
import { type NodeEngine, startNodeEngine } from '../../workers/entries/node-engine';
import { verb } from '../cli/gemel';
import {
  fetchResult,
  openSamples,
  quantityRow,
  saveAs,
  savedResultId,
  signIn,
  waitUntilDone,
  withoutSignInNotice,
} from './support/person';
import { openScene, type Scene } from './support/scene';

/** The main job, as a stranger meets it: one server, one browser, one story told in order. */
let scene: Scene;
let stored: ResultFile;
let resultId = '';
let shownRow = '';

beforeAll(async () => {
  scene = await openScene();
});
afterAll(() => scene.close());

/** WCAG 2.2 AA with all it builds on; the size of targets is off by default. */
const wcag22aa = ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'];

async function expectAccessible(where: string): Promise<void> {
  const { violations } = await new AxeBuilder({ page: scene.page }).withTags(wcag22aa).analyze();
  const found = violations.map((each) => `${each.id}: ${each.nodes.map((node) => node.target).join(' | ')}`);
  expect(found, `axe on ${where}`).toEqual([]);
}

/** 12 significant digits; the last bits of exp and log differ between builds of V8. */
function expectTwelveDigits(there: number | null, here: number | null, what: string): void {
  if (here === null || there === null) {
    expect(there, what).toBe(here);
    return;
  }
  expect(Math.abs(there - here), what).toBeLessThanOrEqual(1e-12 * Math.abs(here));
}

describe('from a fresh data directory to a witness that is still there after a restart', () => {
  it('signs in with the demo sign-in', async () => {
    await scene.page.goto('/');
    await scene.page.getByRole('button', { name: 'Use the demo sign-in' }).waitFor();
    await expectAccessible('sign-in');
    await signIn(scene.page);
    await expectAccessible('home');
  });

  it('opens the samples in one click and shows the witness with its significance', async () => {
    const { page } = scene;
    await openSamples(page);
    await waitUntilDone(page);
    shownRow = await quantityRow(page, 'reid.x');
    expect(shownRow).toMatch(/^Reid product, x \| 0\.0\d+\(\d+\) \| 0\.0\d+\(\d+\) \| ħ² \| [\d.]+ σ/);
    await page
      .getByText(/The Reid product in x lies [\d.]+ standard deviations below the bound/)
      .first()
      .waitFor();
    await expectAccessible('bench');
  });

  it('saves result, preset and session', async () => {
    const { page } = scene;
    await saveAs(page, 'preset', 'Our witness');
    await saveAs(page, 'session', 'Night run');
    await saveAs(page, 'result', 'Witness of the night');
    resultId = await savedResultId(page, 'Witness of the night');
    stored = resultRowSchema.parse(await fetchResult(page, resultId)).result;
  });

  it('shows the same number on the result page after a restart of the server', async () => {
    const { page } = scene;
    await scene.server.restart();
    await page.goto(`/results/${resultId}`);
    await page.getByRole('heading', { name: 'Witness of the night' }).waitFor();
    expect(await quantityRow(page, 'reid.x')).toBe(shownRow);
    const again = resultRowSchema.parse(await fetchResult(page, resultId)).result;
    expect(again).toEqual(stored);
    await page.locator('[data-map="joint.x.near"]').first().waitFor();
    await expectAccessible('result');
  });

  it('finds session and preset again and comes to the same number', async () => {
    const { page } = scene;
    await page.goto('/');
    await page.getByRole('link', { name: /Night run/ }).click();
    await waitUntilDone(page);
    expect(await quantityRow(page, 'reid.x')).toBe(shownRow);
    await page.goto('/presets');
    await page
      .getByRole('link', { name: /Our witness/ })
      .first()
      .click();
    await page.getByRole('heading', { name: /Our witness/ }).waitFor();
    await expectAccessible('preset');
  });

  it('is the same on the command line: counts identical, values to 12 significant digits', async () => {
    const crashes: Error[] = [];
    const engine: NodeEngine = startNodeEngine(2, (error) => crashes.push(error));
    const answer = await verb(
      [
        'run',
        'samples/presets/witness-tags.json',
        ...['--input', 'near=samples/near-tags.h5', '--input', 'far=samples/far-tags.h5'],
        ...['--seed', String(stored.provenance.seed)],
      ],
      engine,
    );
    await engine.close();
    expect([answer.code, crashes]).toEqual([0, []]);
    const here = resultFileSchema.parse(JSON.parse(answer.stdout));
    expect(Object.keys(stored.quantities)).toEqual(Object.keys(here.quantities));
    for (const [id, quantity] of Object.entries(here.quantities)) {
      const there = stored.quantities[id]!;
      expect(there.n, id).toBe(quantity.n);
      expectTwelveDigits(there.value, quantity.value, id);
      expectTwelveDigits(there.sigma, quantity.sigma, `sigma of ${id}`);
    }
    expect(stored.provenance.inputs).toEqual(here.provenance.inputs);
    const words = ({ checks }: ResultFile) =>
      checks.map(({ id, status, sentence }) => [id, status, sentence]);
    expect(words(stored)).toEqual(words(here));
  });

  it('met no script error, no console error and no broken content security policy', () => {
    expect(withoutSignInNotice(scene.faults)).toEqual([]);
  });
});
