/** Whether an answer is the reference's: equal, or within the tolerance. Throws with the first place where it is not. */
export function assertSameAnswer(
  who: string,
  found: Float64Array,
  expected: Float64Array,
  { tolerance, sections }: { tolerance: number; sections: number },
): void {
  if (found.length !== expected.length || expected.length === 0)
    throw new Error(`${who} answers with ${found.length} numbers, the reference with ${expected.length}.`);
  const length = expected.length / sections;
  for (let section = 0; section < sections; section++) {
    const start = section * length;
    let largest = 0;
    for (let i = start; i < start + length; i++) largest = Math.max(largest, Math.abs(expected[i]!));
    if (!(largest > 0)) throw new Error(`The reference of ${who} is zero everywhere, which checks nothing.`);
    const allowed = tolerance * largest;
    for (let i = start; i < start + length; i++) {
      if (Math.abs(found[i]! - expected[i]!) <= allowed) continue;
      throw new Error(
        `${who} answers ${found[i]} at place ${i}, the reference ${expected[i]}; at most ${allowed} apart was expected.`,
      );
    }
  }
}
