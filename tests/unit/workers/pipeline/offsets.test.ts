import { expect, it } from 'vitest';
import { OffsetChain } from '../../../../workers/pipeline/offsets';

it('answers every chunk with the rollovers of those before it, in whatever order they tell', async () => {
  const chain = new OffsetChain();
  const third = chain.ask(2, 5n);
  const first = chain.ask(0, 2n ** 60n);
  expect(await first).toBe(0n);
  const second = chain.ask(1, 3n);
  expect(await second).toBe(2n ** 60n);
  expect(await third).toBe(2n ** 60n + 3n);
  expect(await chain.ask(3, 0n)).toBe(2n ** 60n + 8n);
});

it('lets nobody wait once it is stopped', async () => {
  const chain = new OffsetChain();
  const waiting = chain.ask(1, 3n);
  chain.stop();
  expect(await waiting).toBeNull();
  expect(await chain.ask(0, 1n)).toBeNull();
});
