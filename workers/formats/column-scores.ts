/** Scores above 0 are credible, 1 to 2 likely. */
export interface ColumnScores {
  timeScore: number;
  channelScore: number;
}

const timeName = /time|tick|stamp|arriv|toa/i;
const channelName = /chan|^ch\d*$|pixel|pix|addr|detector|^det|^id$|site|input/i;

/**
 * How likely the first values of a column of integers are times or channels, judged by their order, range and
 * repetition and, weakly, by the name.
 */
export function scoreColumn(values: Float64Array, bytes: number, name: string): ColumnScores {
  let kept = 0;
  let rises = 0;
  let lowest = values[0]!;
  let highest = lowest;
  const distinct = new Set<number>();
  for (let i = 0; i < values.length; i += 1) {
    const value = values[i]!;
    if (i > 0 && value >= values[i - 1]!) kept += 1;
    if (i > 0 && value > values[i - 1]!) rises += 1;
    lowest = Math.min(lowest, value);
    highest = Math.max(highest, value);
    distinct.add(value);
  }
  const steps = Math.max(1, values.length - 1);
  const ordered = values.length > 1 ? kept / steps : 1;
  const isTimeNamed = timeName.test(name);
  const isChannelNamed = channelName.test(name);
  // Unordered columns are times only when they say so and range widely.
  const isTime = highest > lowest || values.length === 1 || isTimeNamed;
  const timeScore =
    isTime && (ordered >= 0.75 || isTimeNamed)
      ? ordered +
        0.3 * (rises / steps) +
        (bytes === 8 ? 0.2 : 0) +
        (highest > 65535 ? 0.2 : 0) +
        (isTimeNamed ? 0.3 : 0) -
        (isChannelNamed ? 0.5 : 0)
      : 0;
  const isChannel = lowest >= 0 && highest <= 65535;
  // A column that never changes is more likely a flag than a channel.
  const isConstant = distinct.size === 1 && values.length > 1;
  const repeats = isConstant ? 0 : 1 - distinct.size / values.length;
  const channelScore = isChannel
    ? 0.5 +
      0.5 * repeats +
      (bytes <= 2 ? 0.2 : 0) +
      (isChannelNamed ? 0.3 : 0) -
      (isTimeNamed ? 0.5 : 0) -
      (isConstant ? 0.3 : 0) -
      (ordered === 1 && distinct.size > 2 ? 0.4 : 0)
    : 0;
  return { timeScore, channelScore };
}
