/**
 * Small settings remembered on this machine. A browser may forbid storage to a page; then a setting lasts until the page
 * is closed, which is worth no message.
 */
const PREFIX = 'gemel.';
const session = new Map<string, string>();

export function readSetting(key: string): string | null {
  const held = session.get(key);
  if (held !== undefined) return held;
  return storage()?.getItem(PREFIX + key) ?? null;
}

export function writeSetting(key: string, value: string): void {
  session.set(key, value);
  try {
    storage()?.setItem(PREFIX + key, value);
  } catch (error) {
    // Full or forbidden: kept in memory above.
    if (!(error instanceof DOMException)) throw error;
  }
}

function storage(): Storage | null {
  try {
    return window.localStorage;
  } catch (error) {
    if (error instanceof DOMException) return null;
    throw error;
  }
}
