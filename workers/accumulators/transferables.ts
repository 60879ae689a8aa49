/**
 * The buffers of all typed arrays in a part, to move it between workers without a copy. Parts are copies, so the
 * accumulator they came from goes on working.
 */
export function transferablesOf(part: object): ArrayBuffer[] {
  const found = new Set<ArrayBuffer>();
  collect(part, found);
  return [...found];
}

function collect(value: unknown, found: Set<ArrayBuffer>): void {
  if (ArrayBuffer.isView(value)) {
    if (value.buffer instanceof ArrayBuffer) found.add(value.buffer);
  } else if (typeof value === 'object' && value !== null) {
    for (const inner of Object.values(value)) collect(inner, found);
  }
}
