import type { SourceRef } from '../../../../shared/contracts/engine';

const keys = new WeakMap<File, string>();
let given = 0;

/** One key a picked file: a browser refuses to read it once its bytes have changed, so the same key means the same bytes. */
export function sourceOf(file: File): SourceRef {
  const key = keys.get(file) ?? `file-${++given}`;
  keys.set(file, key);
  return { name: file.name, size: file.size, file, key };
}
