/** Merges neighbours of an ordered list, in the order the picks say: any association of the same ranges. */
export function mergeAnyOrder<T>(ranges: T[], picks: number[], merge: (left: T, right: T) => T): T {
  const left = [...ranges];
  let turn = 0;
  while (left.length > 1) {
    const at = (picks[turn % Math.max(1, picks.length)] ?? 0) % (left.length - 1);
    left.splice(at, 2, merge(left[at]!, left[at + 1]!));
    turn += 1;
  }
  return left[0]!;
}

/** Cuts [0, length) at the given places (taken modulo length + 1): pieces in order, some of them empty. */
export function cutRanges(length: number, cuts: number[]): { start: number; stop: number }[] {
  const edges = [0, ...cuts.map((cut) => cut % (length + 1)).sort((a, b) => a - b), length];
  return edges.slice(1).map((stop, i) => ({ start: edges[i]!, stop }));
}
