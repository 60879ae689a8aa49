import type { InspectionFacts } from '../../../../shared/contracts/engine';
import type { Acquisition, CompanionFile } from './acquisition';

type TagFacts = Extract<InspectionFacts, { kind: 'tags' }>;

const lastChannel = ({ channels }: TagFacts): number =>
  channels.reduce((last, { channel }) => Math.max(last, channel), -1);

/** Added to the channels of the second clock: nothing where they are apart already, else past the last of the main file. */
export function proposeOffset(main: InspectionFacts | null, companion: InspectionFacts): number {
  if (main?.kind !== 'tags' || companion.kind !== 'tags') return 0;
  const taken = new Set(main.channels.map(({ channel }) => channel));
  const isApart = companion.channels.every(({ channel }) => !taken.has(channel));
  return isApart ? 0 : lastChannel(main) + 1;
}

/** The channels of both files under the names the detector map gives them. */
export function jointFacts(
  main: InspectionFacts,
  companion: Pick<CompanionFile, 'facts' | 'channelOffset'> | null,
): InspectionFacts {
  if (main.kind !== 'tags' || companion?.facts?.kind !== 'tags') return main;
  const shifted = companion.facts.channels.map(({ channel, count }) => ({
    channel: channel + companion.channelOffset,
    count,
  }));
  return { ...main, channels: [...main.channels, ...shifted].sort((a, b) => a.channel - b.channel) };
}

/** What is known of an acquisition's channels, those of its second clock included. */
export function factsOf({ reading, companion }: Acquisition): InspectionFacts | null {
  return reading.status === 'read' ? jointFacts(reading.inspection.facts, companion) : null;
}
