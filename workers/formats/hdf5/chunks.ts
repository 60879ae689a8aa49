/**
 * End of the block that starts at `start`: at most `rows` long, and at a border of stored chunks where one lies within
 * reach, because a chunk cut by blocks is unpacked once for each.
 */
export function nextEnd(start: number, end: number, rows: number, chunkRows: number): number {
  const furthest = start + rows;
  if (furthest >= end) return end;
  const border = furthest - (furthest % chunkRows);
  return border > start ? border : furthest;
}
