import type { InspectionFacts } from '../../shared/contracts/engine';
import type { Reader } from '../../shared/contracts/reader';
import { tickSpanToSeconds } from '../../shared/units/ticks';

const firstShown = 20;

type TagFacts = Extract<InspectionFacts, { kind: 'tags' }>;

export interface TagSummary {
  facts: TagFacts;
  warnings: string[];
}

/**
 * The first `limit` records of a reader, summed up for the reading dialog. Times are compared as 64-bit integers between
 * blocks and as exact differences inside them.
 */
export async function summariseTags(
  reader: Reader,
  records: number,
  tickFs: number,
  limit: number,
): Promise<TagSummary> {
  const sampled = Math.min(records, limit);
  const counts = new Map<number, number>();
  const first: TagFacts['first'] = [];
  let tags = 0;
  let backward = 0;
  let largestFall = 0;
  let previous: bigint | null = null;
  let earliest: bigint | null = null;
  let latest: bigint | null = null;
  for await (const block of reader.read({ start: 0, end: sampled }, 0n, { cancelled: false })) {
    if (block.kind !== 'tags' || block.count === 0) continue;
    const { deltaTick, channel, count, baseTick } = block;
    let last: number = previous === null ? deltaTick[0]! : Number(previous - baseTick);
    let low = deltaTick[0]!;
    let high = low;
    for (let i = 0; i < count; i += 1) {
      const delta = deltaTick[i]!;
      if (delta < last) {
        backward += 1;
        largestFall = Math.max(largestFall, last - delta);
      }
      last = delta;
      if (delta < low) low = delta;
      if (delta > high) high = delta;
      const name = channel[i]!;
      counts.set(name, (counts.get(name) ?? 0) + 1);
      if (first.length < firstShown) first.push({ tick: String(baseTick + BigInt(delta)), channel: name });
    }
    tags += count;
    previous = baseTick + BigInt(last);
    const blockLow = baseTick + BigInt(low);
    const blockHigh = baseTick + BigInt(high);
    if (earliest === null || blockLow < earliest) earliest = blockLow;
    if (latest === null || blockHigh > latest) latest = blockHigh;
  }
  const span = earliest === null || latest === null ? 0n : latest - earliest;
  const channels = [...counts]
    .map(([channel, count]) => ({ channel, count }))
    .sort((a, b) => a.channel - b.channel);
  return {
    facts: {
      kind: 'tags',
      records,
      first,
      channels,
      sampled,
      sampledSeconds: tickSpanToSeconds(span, tickFs),
    },
    warnings: warningsOf(tags, sampled, channels.length, backward, largestFall, span),
  };
}

function warningsOf(
  tags: number,
  sampled: number,
  channels: number,
  backward: number,
  largestFall: number,
  span: bigint,
): string[] {
  const part = sampled === 1 ? 'the first record' : `the first ${sampled} records`;
  if (sampled === 0) return ['The file holds no records.'];
  if (tags === 0)
    return [
      `None of ${part} is a tag: all are rollovers or skipped; check the rollover and skip conditions.`,
    ];
  const warnings: string[] = [];
  if (backward > 0) {
    warnings.push(
      `${backward} of ${part} lie before the one they follow, by up to ${largestFall} ticks: the tags are out of order, or the time bits, byte order or rollover are wrong.`,
    );
  }
  if (channels === 1) {
    warnings.push(
      `All tags in ${part} are on one channel; pairs need at least two. Check the channel field.`,
    );
  }
  if (tags > 1 && span === 0n) warnings.push(`All tags in ${part} have the same time; check the time field.`);
  return warnings;
}
