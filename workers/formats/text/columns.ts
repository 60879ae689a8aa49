import { isNumber, type SampledText } from './sample';

export interface ChosenColumns {
  time: number;
  channel: number;
  /** How the time column rises, in words. */
  rises: string;
  channels: number;
  lastChannel: number;
  warnings: string[];
}

interface ColumnFacts {
  column: number;
  name: string;
  /** Share of steps that do not fall, and of those that rise. */
  ordered: number;
  rising: number;
  isCount: boolean;
  isChannel: boolean;
  values: number;
  last: number;
}

const timeName = /time|stamp|^t\b|^t[_ [(]|tick|tag|zeit/i;
const channelName = /chan|^ch\b|^ch[_ ]?\d*$|^c$|detect|input|pixel|kanal|line|port/i;
/** Doubles are enough here: they blur at most steps of a few ticks. */
const leastOrdered = 0.9;

/** Which columns are time and channel: names in the heading before the numbers. Null when nothing rises or tells channels. */
export function chooseColumns(sample: SampledText): ChosenColumns | null {
  const facts = sample.rows[0]!.map((_, column) => columnFacts(sample, column)).filter(
    (each) => each !== null,
  );
  const times = facts.filter((each) => each.ordered >= leastOrdered && each.rising > 0 && !each.isCount);
  const rising = times.length > 0 ? times : facts.filter((each) => each.isCount);
  const time =
    facts.find((each) => timeName.test(each.name) && !channelName.test(each.name)) ??
    rising.reduce<ColumnFacts | null>(
      (best, each) => (best && best.values >= each.values ? best : each),
      null,
    );
  if (time === null || time === undefined) return null;
  const others = facts.filter((each) => each !== time && each.isChannel);
  const named = others.find((each) => channelName.test(each.name));
  const channel = named ?? others.reduce<ColumnFacts | null>(fewer, null);
  if (channel === null) return null;
  const warnings: string[] = [];
  if (!timeName.test(time.name) && times.length > 1) {
    warnings.push(
      `Columns ${list(times)} all rise: column ${time.column + 1} is taken for the time, choose another if it is not.`,
    );
  }
  if (named === undefined && others.length > 1) {
    warnings.push(
      `Columns ${list(others)} all hold few whole numbers: column ${channel.column + 1} is taken for the channel, choose another if it is not.`,
    );
  }
  return {
    time: time.column,
    channel: channel.column,
    rises: time.ordered === 1 ? 'never falls' : `rises in ${(time.ordered * 100).toFixed(0)} % of the steps`,
    channels: channel.values,
    lastChannel: channel.last,
    warnings,
  };
}

const list = (facts: readonly ColumnFacts[]): string => facts.map((each) => each.column + 1).join(', ');

/** A column that never changes says less than one that does. */
function fewer(best: ColumnFacts | null, each: ColumnFacts): ColumnFacts {
  if (best === null || (best.values === 1 && each.values > 1)) return each;
  return each.values > 1 && each.values < best.values ? each : best;
}

function columnFacts({ rows, header, decimal }: SampledText, column: number): ColumnFacts | null {
  if (!rows.every((row) => isNumber(row[column]!, decimal))) return null;
  const values = rows.map((row) => Number(row[column]!.replace(',', '.')));
  const seen = new Set(values);
  let ordered = 0;
  let rising = 0;
  let ones = 0;
  for (let i = 1; i < values.length; i += 1) {
    const step = values[i]! - values[i - 1]!;
    if (step >= 0) ordered += 1;
    if (step > 0) rising += 1;
    if (step === 1) ones += 1;
  }
  const steps = Math.max(1, values.length - 1);
  return {
    column,
    name: header?.[column] ?? '',
    ordered: values.length === 1 ? 1 : ordered / steps,
    rising: values.length === 1 ? 1 : rising / steps,
    isCount: steps >= 3 && ones === steps,
    isChannel:
      values.every((value) => Number.isInteger(value) && value >= 0 && value <= 65535) &&
      seen.size <= Math.max(4, Math.min(4096, rows.length / 4)),
    values: seen.size,
    last: Math.max(...seen),
  };
}
