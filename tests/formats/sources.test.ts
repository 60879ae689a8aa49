import { execFile } from 'node:child_process';
import { writeFile } from 'node:fs/promises';
import { promisify } from 'node:util';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Cancelled } from '../../shared/errors/problem';
import { openRecords } from '../../workers/formats/records/reader';
import { passTurn } from '../../workers/formats/turn';
import { openPathSource } from '../../workers/pipeline/node-source';
import { openBlobSource } from '../../workers/pipeline/sources';
import { recordsLayout } from './support/record-writer';
import { fileSource, makeFolder, memorySource, problemOf } from './support/sources';

let folder: Awaited<ReturnType<typeof makeFolder>>;
beforeAll(async () => {
  folder = await makeFolder();
});
afterAll(() => folder.remove());

const bytes = Uint8Array.from({ length: 1000 }, (_, i) => i % 251);

describe('byte sources', () => {
  it('read slices, clipped to the file', async () => {
    const path = folder.path('some.bin');
    await writeFile(path, bytes);
    for (const source of [memorySource(bytes), await fileSource(path)]) {
      expect(source.size).toBe(1000);
      expect([...(await source.read(10, 20))]).toEqual([...bytes.subarray(10, 20)]);
      expect((await source.read(990, 2000)).length).toBe(10);
      expect((await source.read(2000, 3000)).length).toBe(0);
      expect((await source.read(5, 5)).length).toBe(0);
      await source.close();
    }
  });

  it('say what is missing', async () => {
    const missing = folder.path('nowhere.bin');
    const problem = await problemOf(
      () => openPathSource({ name: 'a', size: 1, path: missing }),
      'unreadable',
    );
    expect(problem).toMatchObject({ place: missing, message: expect.stringContaining('There is no file') });
    const place = folder.path('');
    expect(
      (await problemOf(() => openPathSource({ name: 'a', size: 1, path: place }), 'unreadable')).message,
    ).toContain('folder');
    await problemOf(() => openPathSource({ name: 'a', size: 1 }), 'missing-input');
    await problemOf(() => openBlobSource({ name: 'a', size: 1 }), 'missing-input');
  });

  it('say when a picked file can no longer be read', async () => {
    const gone = {
      size: 9,
      slice: () => ({ arrayBuffer: () => Promise.reject(new Error('NotReadableError')) }),
    };
    const source = openBlobSource({ name: 'moved.bin', size: 9, file: gone });
    expect(await problemOf(() => source.read(4, 9), 'unreadable')).toMatchObject({
      place: 'moved.bin, byte 4',
      message: expect.stringContaining('pick it again'),
    });
  });
});

describe('turns', () => {
  it('let a cancel arrive between blocks', async () => {
    const layout = recordsLayout({});
    const source = memorySource(new Uint8Array(8 * (2 ** 21 + 5)));
    const reader = openRecords(source, layout);
    const token = { cancelled: false };
    let records = 0;
    const reading = async (): Promise<void> => {
      for await (const block of reader.read({ start: 0, end: 2 ** 21 + 5 }, 0n, token)) {
        records += block.kind === 'tags' ? block.records : 0;
        setImmediate(() => {
          token.cancelled = true;
        });
      }
    };
    await expect(reading()).rejects.toBeInstanceOf(Cancelled);
    expect(records).toBeLessThan(2 ** 21 + 5);
  });

  it('end at once when cancelled before', async () => {
    await expect(passTurn({ cancelled: true })).rejects.toBeInstanceOf(Cancelled);
  });

  it('leave no port open: a process that has passed many turns ends by itself', async () => {
    const code = `
      import { passTurn } from ${JSON.stringify(new URL('../../workers/formats/turn.ts', import.meta.url).href)};
      for (let i = 0; i < 2000; i += 1) await passTurn({ cancelled: false });
      await new Promise((resolve) => setTimeout(resolve, 20));
      console.log(process.getActiveResourcesInfo().filter((name) => /Message/.test(name)).length);
    `;
    const run = promisify(execFile);
    const { stdout } = await run(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', code], {
      timeout: 50_000,
    });
    expect(stdout.trim()).toBe('0');
  });
});
