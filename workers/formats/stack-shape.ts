/** Where the frames of an array lie: its sizes without the axis that is left out, and the axis along which frames follow. */
export interface StackShape {
  frames: number;
  height: number;
  width: number;
  frameAxis: 0 | 1;
}

/**
 * Frame, y, x of a shape of three dimensions, or of four where one has length 1: where colours, channels or a run would
 * stand is looked first. Null for any other shape.
 */
export function stackShape(shape: readonly number[]): StackShape | null {
  const axis =
    shape.length === 3 ? -1 : shape.length === 4 ? [1, 3, 0, 2].find((each) => shape[each] === 1) : undefined;
  if (axis === undefined) return null;
  const [frames, height, width] = shape.filter((_, each) => each !== axis) as [number, number, number];
  return { frames, height, width, frameAxis: axis === 0 ? 1 : 0 };
}
