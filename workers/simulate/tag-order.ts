/**
 * Holds tags until nothing earlier can come, then hands them out in time order. Tags arrive nearly sorted (jitter and
 * cable delays are short beside the gaps), so an insertion sort is the quick one.
 */
export interface TagOrder {
  push(channel: number, tick: number): void;
  readonly count: number;
  /** Sorts and hands out the tags before `tick`; keeps the rest. */
  takeBefore(tick: number): { tick: Float64Array; channel: Uint16Array };
  rebase(tick: number): void;
}

export function createTagOrder(): TagOrder {
  let ticks = new Float64Array(1 << 16);
  let channels = new Uint16Array(1 << 16);
  let count = 0;

  const sort = (): void => {
    for (let i = 1; i < count; i++) {
      const tick = ticks[i]!;
      const channel = channels[i]!;
      let at = i - 1;
      while (at >= 0 && ticks[at]! > tick) {
        ticks[at + 1] = ticks[at]!;
        channels[at + 1] = channels[at]!;
        at -= 1;
      }
      ticks[at + 1] = tick;
      channels[at + 1] = channel;
    }
  };

  return {
    push(channel, tick) {
      if (count === ticks.length) {
        const [longerTicks, longerChannels] = [new Float64Array(2 * count), new Uint16Array(2 * count)];
        longerTicks.set(ticks);
        longerChannels.set(channels);
        ticks = longerTicks;
        channels = longerChannels;
      }
      ticks[count] = tick;
      channels[count] = channel;
      count += 1;
    },
    get count() {
      return count;
    },
    takeBefore(tick) {
      sort();
      let ready = 0;
      while (ready < count && ticks[ready]! < tick) ready += 1;
      const taken = { tick: ticks.slice(0, ready), channel: channels.slice(0, ready) };
      ticks.copyWithin(0, ready, count);
      channels.copyWithin(0, ready, count);
      count -= ready;
      return taken;
    },
    rebase(tick) {
      for (let i = 0; i < count; i++) ticks[i]! -= tick;
    },
  };
}
