import type { Visit } from '../../e2e/support/browser';

/** Slices as a reader would take them. */
const SLICE_BYTES = 16 * 2 ** 20;

const script = `self.onmessage = async ({ data: { file, slice } }) => {
  const start = performance.now();
  let bytes = 0;
  for (let at = 0; at < file.size; at += slice) bytes += (await file.slice(at, at + slice).arrayBuffer()).byteLength;
  self.postMessage({ bytes, seconds: (performance.now() - start) / 1000 });
};`;

/** Seconds that one worker of the same browser takes to get all bytes of a file, doing nothing with them. */
export async function readBare({ page }: Visit, path: string): Promise<number> {
  await page.route('**/bare-reading.js', (route) =>
    route.fulfill({
      contentType: 'text/javascript',
      headers: {
        'Cross-Origin-Embedder-Policy': 'require-corp',
        'Cross-Origin-Resource-Policy': 'same-origin',
      },
      body: script,
    }),
  );
  await page.goto('/');
  await page.evaluate(() => {
    const input = document.createElement('input');
    input.type = 'file';
    input.id = 'bare-file';
    document.body.append(input);
  });
  await page.locator('#bare-file').setInputFiles(path);
  const read = await page.evaluate(
    (slice) =>
      new Promise<{ bytes: number; size: number; seconds: number }>((resolve, reject) => {
        const file = document.querySelector<HTMLInputElement>('#bare-file')?.files?.[0];
        if (file === undefined) throw new Error('No file was given.');
        const worker = new Worker('/bare-reading.js');
        worker.onmessage = ({ data }) => resolve({ ...data, size: file.size });
        worker.onerror = (event) => reject(new Error(`The reading worker failed: ${event.message}`));
        worker.postMessage({ file, slice });
      }),
    SLICE_BYTES,
  );
  if (read.bytes !== read.size) throw new Error(`Of ${read.size} bytes ${read.bytes} were read.`);
  return read.seconds;
}
