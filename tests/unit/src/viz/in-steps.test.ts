import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { runInSteps } from '../../../../src/viz/in-steps';

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

function* counted(name: string, count: number, done: string[]): Generator<void> {
  for (let i = 0; i < count; i++) {
    done.push(`${name}${i}`);
    yield;
  }
}

describe('long loops in short tasks', () => {
  it('does all steps in their order and tells the end', async () => {
    const done: string[] = [];
    runInSteps(counted('a', 3, done), () => done.push('end of a'));
    runInSteps(counted('b', 2, done), () => done.push('end of b'));
    expect(done).toEqual([]);
    await vi.runAllTimersAsync();
    expect(done).toEqual(['a0', 'a1', 'a2', 'end of a', 'b0', 'b1', 'end of b']);
  });

  it('gives way after a few milliseconds', async () => {
    vi.useRealTimers();
    let tasks = 0;
    function* spinning(): Generator<void> {
      for (let i = 0; i < 40; i++) {
        const until = performance.now() + 2;
        while (performance.now() < until);
        yield;
      }
    }
    const end = new Promise<void>((resolve) => void runInSteps(spinning(), resolve));
    let isOver = false;
    void end.then(() => {
      isOver = true;
    });
    while (!isOver) {
      await new Promise((resolve) => setTimeout(resolve, 0));
      tasks += 1;
    }
    // 80 ms of work in steps of 2 ms: at least five tasks of 12 ms with a chance for others between them.
    expect(tasks).toBeGreaterThanOrEqual(4);
  });

  it('takes off what is no longer wanted, and goes on after one that fails', async () => {
    const done: string[] = [];
    const stop = runInSteps(counted('a', 2, done), () => done.push('end of a'));
    stop();
    function* failing(): Generator<void> {
      yield;
      throw new Error('no canvas');
    }
    runInSteps(failing(), () => done.push('end of failing'));
    runInSteps(counted('b', 1, done), () => done.push('end of b'));
    await expect(vi.runAllTimersAsync()).rejects.toThrow('no canvas');
    await vi.runAllTimersAsync();
    expect(done).toEqual(['b0', 'end of b']);
  });
});
