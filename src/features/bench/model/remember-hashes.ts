import { type Acquisition, type FilePart, partsOf } from './acquisition';
import type { BenchState } from './bench-types';

/**
 * Two files may share name and size, so the fingerprints go to the acquisition that served the input, one for each of its
 * files in their order.
 */
export function rememberHashes(
  shelf: BenchState['shelf'],
  holders: Record<string, string | null>,
  inputs: readonly { name: string; sha256: string }[],
): BenchState['shelf'] {
  const hashes = new Map<string | null | undefined, string[]>();
  for (const { name, sha256 } of inputs) {
    const holder = holders[name];
    hashes.set(holder, [...(hashes.get(holder) ?? []), sha256]);
  }
  const isNews = shelf.some((a) =>
    partsOf(a).some(({ sha256 }, i) => (hashes.get(a.id)?.[i] ?? sha256) !== sha256),
  );
  if (!isNews) return shelf;
  return shelf.map((a) => withHashes(a, hashes.get(a.id) ?? []));
}

function withHashes(acquisition: Acquisition, found: readonly string[]): Acquisition {
  const { following, companion } = acquisition;
  const hashed = <T extends FilePart>(part: T, place: number): T => {
    const sha256 = found[place] ?? part.sha256;
    return sha256 === part.sha256 ? part : { ...part, sha256 };
  };
  const whole = hashed(acquisition, 0);
  const rest = following.map((part, i) => hashed(part, i + 1));
  const second = companion === null ? null : hashed(companion, following.length + 1);
  const isSame = second === companion && rest.every((part, i) => part === following[i]);
  return isSame ? whole : { ...whole, following: rest, companion: second };
}
