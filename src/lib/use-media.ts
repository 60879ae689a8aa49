import { useCallback, useSyncExternalStore } from 'react';

/** Does a media query hold now? Follows the window. */
export function useMedia(query: string): boolean {
  const subscribe = useCallback(
    (onChange: () => void) => {
      const list = window.matchMedia?.(query);
      list?.addEventListener('change', onChange);
      return () => list?.removeEventListener('change', onChange);
    },
    [query],
  );
  // Browsers without a window to measure (tests) have the wide layout.
  return useSyncExternalStore(subscribe, () => window.matchMedia?.(query).matches ?? false);
}
