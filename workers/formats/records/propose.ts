import type { RecordsLayout } from '../../../shared/contracts/layout';
import { FS_PER_PS } from '../../../shared/units/ticks';
import { type Guess, guessRecords } from './guess';
import { guessMarkers, type MarkerGuess } from './guess-markers';

export interface RecordsProposal {
  layout: RecordsLayout;
  because: string;
  warnings: string[];
}

/** Bytes from the start of a file that a proposal is made from. */
export const proposalBytes = 2 ** 18;

/** Splits without markers are many, and tell themselves apart sooner. */
const plainBytes = 2 ** 16;

/** What every proposal takes for granted, because bytes do not tell. */
const unknownFromBytes = {
  version: 1,
  format: 'records',
  kind: 'tags',
  headerBytes: 0,
  skip: [],
  tickFs: FS_PER_PS,
} satisfies Partial<RecordsLayout>;

const tickWarning =
  'The length of a tick cannot be known from such bytes: 1 ps is proposed, set the one of your time tagger.';

/** A layout for the bytes, or null. What bytes cannot tell (tick length, markers) is said in `warnings`. */
export function proposeRecords(sample: Uint8Array, size: number): RecordsProposal | null {
  const marked = guessMarkers(sample);
  if (marked !== null) return markedProposal(marked);
  const guess = guessRecords(sample.subarray(0, plainBytes), size);
  if (guess === null) return null;
  const { recordBytes, byteOrder, time, channel } = guess;
  // Shorter fields may wrap after the sampled part: in ordered tags `wrap` is right whether they do or not.
  const rollover = time.bits < 64 ? ({ in: 'wrap' } as const) : ({ in: 'none' } as const);
  return {
    layout: { ...unknownFromBytes, recordBytes, byteOrder, time, channel, rollover },
    because: because(guess),
    warnings: [
      tickWarning,
      ...(time.bits < 64
        ? [
            'Records that announce rollovers or states cannot be told from tags: set their conditions if your time tagger writes them.',
          ]
        : []),
    ],
  };
}

function markedProposal(guess: MarkerGuess): RecordsProposal {
  const { recordBytes, byteOrder, time, channel, flag, wraps, records, markers, channels, lastChannel } =
    guess;
  const counted = wraps === 'time-field' ? 'holds how many periods passed' : 'stands for one period';
  return {
    layout: {
      ...unknownFromBytes,
      recordBytes,
      byteOrder,
      time,
      channel,
      rollover: { in: 'marker', when: [{ field: flag, equals: 1 }], advanceTick: 2 ** time.bits, wraps },
    },
    because: `Read as ${orderName(byteOrder)} records of ${recordBytes} bytes, bits ${bitRange(time)} fall only across the ${markers} of the first ${records} records whose bit ${flag.firstBit} is set, and bits ${bitRange(channel)} hold ${channels} values up to ${lastChannel}.`,
    warnings: [
      tickWarning,
      `Each record with bit ${flag.firstBit} set is taken to announce a rollover of ${2 ** time.bits} ticks and ${counted}: compare the length of the run with the clock.`,
    ],
  };
}

function orderName(byteOrder: 'little' | 'big'): string {
  return byteOrder === 'little' ? 'little-endian' : 'big-endian';
}

function because({
  recordBytes,
  byteOrder,
  time,
  channel,
  records,
  wraps,
  backward,
  channels,
  lastChannel,
}: Guess): string {
  const falls =
    backward > 0
      ? `hardly ever fall (${backward} times)`
      : wraps > 0
        ? 'fall only where they wrap'
        : 'never fall';
  const values =
    channels === 1 ? `hold one value, ${lastChannel}` : `hold ${channels} values up to ${lastChannel}`;
  return `Read as ${orderName(byteOrder)} records of ${recordBytes} bytes, bits ${bitRange(time)} ${falls} over the first ${records} records and bits ${bitRange(channel)} ${values}.`;
}

function bitRange({ firstBit, bits }: { firstBit: number; bits: number }): string {
  return `${firstBit} to ${firstBit + bits - 1}`;
}
