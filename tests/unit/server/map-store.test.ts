import { createHash } from 'node:crypto';
import { mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { createMapStore } from '../../../server/data/map-store';

describe('map store', () => {
  const root = mkdtempSync(join(tmpdir(), 'gemel-maps-'));
  const store = createMapStore(root);
  afterAll(() => rmSync(root, { recursive: true, force: true }));

  it('names files by the hash of their bytes and leaves no drafts', async () => {
    const bytes = new TextEncoder().encode('sixteen of these');
    const hash = createHash('sha256').update(bytes).digest('hex');
    const answers = await Promise.all([store.write(bytes), store.write(bytes), store.write(bytes)]);
    expect(answers).toEqual(Array(3).fill({ hash, bytes: 16 }));
    expect(readdirSync(join(root, hash.slice(0, 2)))).toEqual([`${hash}.gz`]);
    expect(await store.read(hash)).toMatchObject({ raw: Buffer.from(bytes) });
  });

  it('keeps empty bytes, misses what is not there, and removes twice', async () => {
    const { hash } = await store.write(new Uint8Array(0));
    expect((await store.read(hash))?.raw.length).toBe(0);
    await store.remove(hash);
    await store.remove(hash);
    expect(await store.read(hash)).toBeNull();
  });

  it('runs work one at a time, also after a failure', async () => {
    const order: string[] = [];
    const slow = store.alone(async () => {
      await new Promise((resolve) => setTimeout(resolve, 20));
      order.push('slow');
      throw new Error('failed');
    });
    const next = store.alone(async () => void order.push('next'));
    await expect(slow).rejects.toThrow('failed');
    await next;
    expect(order).toEqual(['slow', 'next']);
  });
});
