/** A window or several on tau, whole ticks, both ends included. */
export interface TauWindow {
  loTick: number;
  hiTick: number;
}

/** Pairs in here have to be counted `weight` times more. */
export interface TauChange extends TauWindow {
  weight: number;
}

/**
 * What changes from one set of windows to another, as stretches of tau in order: how many more windows of `to` than of
 * `from` a pair there lies in. Windows may overlap. From an empty set it is the windows themselves.
 */
export function windowChanges(from: readonly TauWindow[], to: readonly TauWindow[]): TauChange[] {
  const steps = new Map<number, number>();
  const step = (tick: number, by: number): void => {
    steps.set(tick, (steps.get(tick) ?? 0) + by);
  };
  for (const [windows, by] of [[from, -1] as const, [to, 1] as const]) {
    for (const { loTick, hiTick } of windows) {
      if (hiTick < loTick) continue;
      step(loTick, by);
      step(hiTick + 1, -by);
    }
  }
  const ticks = [...steps.keys()].sort((a, b) => a - b);
  const changes: TauChange[] = [];
  let weight = 0;
  for (const [i, loTick] of ticks.entries()) {
    weight += steps.get(loTick) ?? 0;
    const next = ticks[i + 1];
    if (weight !== 0 && next !== undefined) changes.push({ loTick, hiTick: next - 1, weight });
  }
  return changes;
}
