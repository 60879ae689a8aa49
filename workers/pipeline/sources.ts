import type { SourceRef } from '../../shared/contracts/engine';
import type { ByteSource } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';

/** Bytes of a browser `File`, or of anything sliced like one. Nothing is read before it is asked for. */
export function openBlobSource(ref: SourceRef): ByteSource {
  const { file, name } = ref;
  if (!file) {
    throw new Problem(
      'missing-input',
      `Expected the file ${name} itself, found only its name; pick it again.`,
      name,
    );
  }
  const { size } = file;
  return {
    name,
    size,
    ref: { ...ref, size },
    read: async (start, end) => {
      const from = Math.min(Math.max(0, start), size);
      const to = Math.min(Math.max(from, end), size);
      if (from === to) return new Uint8Array(0);
      try {
        return new Uint8Array(await file.slice(from, to).arrayBuffer());
      } catch (thrown) {
        throw unreadable(name, from, thrown);
      }
    },
    close: async () => {},
  };
}

/** Browsers refuse a picked file that was moved, deleted or changed since. */
function unreadable(name: string, byte: number, thrown: unknown): Problem {
  const detail = thrown instanceof Error ? thrown.message : String(thrown);
  return new Problem(
    'unreadable',
    `${name} could not be read from byte ${byte} on (${detail}); it may have been moved or changed since it was picked, pick it again.`,
    `${name}, byte ${byte}`,
  );
}
