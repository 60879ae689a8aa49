import { cleanup } from '@testing-library/react';
import { afterEach, beforeEach, vi } from 'vitest';

/** jsdom lays nothing out: every box gets one size, and nothing ever resizes. */
export function stageOf(width: number, height: number): void {
  beforeEach(() => {
    vi.stubGlobal(
      'ResizeObserver',
      class {
        readonly #tell: ResizeObserverCallback;
        constructor(tell: ResizeObserverCallback) {
          this.#tell = tell;
        }
        /** The first size is told, as browsers do. */
        observe(): void {
          this.#tell([], this);
        }
        unobserve(): void {}
        disconnect(): void {}
      },
    );
    vi.spyOn(HTMLElement.prototype, 'clientWidth', 'get').mockReturnValue(width);
    vi.spyOn(HTMLElement.prototype, 'clientHeight', 'get').mockReturnValue(height);
    // Capture does not exist there either.
    Object.assign(Element.prototype, { setPointerCapture: () => undefined });
  });
  afterEach(() => {
    cleanup();
    vi.restoreAllMocks();
    vi.unstubAllGlobals();
  });
}
