import type { Page } from 'playwright-core';
import type { Preset } from '../../../shared/contracts/preset';
import { openBrowser, openPage, type Visit } from '../../e2e/support/browser';
import { signIn } from '../../e2e/support/person';
import { descendantsOf, watchMemory } from '../process-tree';

export const isRenderer = (command: string): boolean => command.includes('--type=renderer');

/** Text, as `watchScript` is. One compute worker a core is the product's rule: so the page starts as many as are wanted. */
const startScript = (workers: number): string => `
  Object.defineProperty(Navigator.prototype, 'hardwareConcurrency', { get: () => ${workers} });
  window.benchTasks = { longestMs: 0 };
  new PerformanceObserver((list) => {
    for (const { duration } of list.getEntries())
      window.benchTasks.longestMs = Math.max(window.benchTasks.longestMs, duration);
  }).observe({ type: 'longtask' });
`;

/** A browser of its own for every visit: nothing is remembered, and its memory is its own. */
export async function withVisit<T>(
  url: string,
  workers: number,
  use: (visit: Visit) => Promise<T>,
): Promise<T> {
  const browser = await openBrowser();
  try {
    const visit = await openPage(browser, url);
    await visit.page.addInitScript(startScript(workers));
    return await use(visit);
  } finally {
    await browser.close();
  }
}

export interface Drop {
  firstMapSeconds: number;
  /** Until everything is counted; fingerprints come after. */
  countedSeconds: number;
  doneSeconds: number;
  /** On the page's own thread; 0 when none was longer than 50 ms. */
  longestTaskMs: number;
  /** Above what the page took before the file. */
  peakMB: number | null;
}

/** A bench that waits for a file of the preset. */
async function openBench(page: Page, preset: Preset): Promise<void> {
  await signIn(page);
  const id = await page.evaluate(async (body) => {
    const me = await (await fetch('/api/me')).json();
    const answer = await fetch(`/api/groups/${me.groups[0].id}/presets`, {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify({ preset: body }),
    });
    return String((await answer.json()).id);
  }, preset);
  await page.goto(`/bench?preset=${id}`);
  await page.getByRole('button', { name: 'Open files' }).first().waitFor();
}

/** Gives the file to the page's own input, as a drop does; returns when the page has it. */
async function giveFile(page: Page, path: string): Promise<void> {
  await page.getByTestId('bench-files').setInputFiles(path);
}

/** Notes when the page has the file, shows a map, has counted everything and is done. Text, because the compiler of the
 * bench names functions by a helper that the page does not have. */
const watchScript = `
  window.benchMoments = {};
  const note = (name) => { window.benchMoments[name] ??= performance.now(); };
  document.querySelector('[data-testid=bench-files]').addEventListener('change', () => note('given'), true);
  const watch = () => {
    requestAnimationFrame(watch);
    if (window.benchMoments.given === undefined) return;
    if (document.querySelector('[data-map]') !== null) note('map');
    const stage = document.querySelector('[data-testid=run-progress]')?.getAttribute('title') ?? '';
    const isDone = [...document.querySelectorAll('[role=status]')].some((e) => e.textContent.startsWith('done in '));
    if (stage.startsWith('fingerprint') || isDone) note('counted');
    if (isDone) note('done');
  };
  watch();
`;

/** From the file to the end of the run, or to the end of counting when `whole` is false. */
export async function dropFile(
  { page, faults }: Visit,
  preset: Preset,
  path: string,
  whole: boolean,
): Promise<Drop> {
  await openBench(page, preset);
  const before = rendererMB();
  const memory = watchMemory(process.pid, isRenderer);
  await page.evaluate(watchScript);
  await giveFile(page, path);
  await page.waitForFunction(
    (end) => (window as unknown as { benchMoments: Record<string, number> }).benchMoments[end] !== undefined,
    whole ? 'done' : 'counted',
    { timeout: 600_000, polling: 'raf' },
  );
  const seen = await page.evaluate(() => {
    const { benchMoments, benchTasks } = window as unknown as {
      benchMoments: Record<string, number>;
      benchTasks: { longestMs: number };
    };
    return { moments: benchMoments, longestMs: benchTasks.longestMs };
  });
  const peak = memory.stop();
  if (faults.some((fault) => fault.startsWith('error')))
    throw new Error(`The page failed: ${faults.join('; ')}`);
  const since = (name: string): number => {
    const { given, [name]: moment } = seen.moments;
    return moment === undefined || given === undefined ? Number.NaN : (moment - given) / 1000;
  };
  return {
    firstMapSeconds: since('map'),
    countedSeconds: since('counted'),
    doneSeconds: since('done'),
    longestTaskMs: seen.longestMs,
    peakMB: peak === null ? null : peak - before,
  };
}

function rendererMB(): number {
  return descendantsOf(process.pid)
    .filter(({ command }) => isRenderer(command))
    .reduce((sum, { residentMB }) => sum + residentMB, 0);
}

/** Text, as `watchScript` is. */
const cancelScript = `new Promise((resolve) => {
  const start = performance.now();
  const labelled = (text) => [...document.querySelectorAll('button')].find((b) => b.textContent === text);
  labelled('Cancel').click();
  const look = () => labelled('Run again') ? resolve(performance.now() - start) : requestAnimationFrame(look);
  look();
})`;

export interface CancelLatency {
  /** Until the page says so. */
  saidMs: number;
  /** Until its processes rest; null where that cannot be seen. */
  restMs: number | null;
}

/** Cancels a run in the middle of its file. */
export async function cancelRun({ page }: Visit, preset: Preset, path: string): Promise<CancelLatency> {
  await openBench(page, preset);
  await giveFile(page, path);
  await page.locator('[data-map]').first().waitFor({ state: 'attached', timeout: 60_000 });
  const start = performance.now();
  const saidMs = Number(await page.evaluate(cancelScript));
  return { saidMs, restMs: await untilRest(start) };
}

const LOOK_MS = 50;
/** Work is at rest when it took less than this share of one core for four looks. */
const REST_SHARE = 0.3;

async function untilRest(start: number): Promise<number | null> {
  const ticks = (): number =>
    descendantsOf(process.pid)
      .filter(({ command }) => isRenderer(command))
      .reduce((sum, { cpuTicks }) => sum + cpuTicks, 0);
  if (ticks() === 0) return null;
  let last = ticks();
  let restSince = performance.now();
  while (performance.now() - restSince < 4 * LOOK_MS) {
    await new Promise((resolve) => setTimeout(resolve, LOOK_MS));
    const now = ticks();
    if ((now - last) * 10 > REST_SHARE * LOOK_MS) restSince = performance.now();
    last = now;
  }
  return restSince - start;
}
