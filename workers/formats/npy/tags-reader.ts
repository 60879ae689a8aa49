import type { TagBlock } from '../../../shared/contracts/blocks';
import type { NpyTagsLayout } from '../../../shared/contracts/layout';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { viewNumbers } from '../numbers';
import { assertRange, bytesOfRange } from '../ranges';
import { channelsOf, ticksOf } from '../tag-columns';
import { passTurn } from '../turn';
import type { ArrayFile } from './arrays';
import { type ColumnReader, openColumns } from './column-reader';
import { arrayName, type ColumnPlace, placeColumn } from './columns';
import { assertWhole } from './whole-floats';

/** Records a block: at most a million, and rows of at most 16 MiB. */
const mostRecords = 2 ** 20;
const mostBytes = 2 ** 24;

/** Tags of two columns of whole numbers. Their times are absolute, so that ranges need no offset. */
export async function openTags(source: ByteSource, file: ArrayFile, layout: NpyTagsLayout): Promise<Reader> {
  const timeArray = await file.find(layout.time.array);
  const isSame = layout.channel.array === layout.time.array;
  const channelArray = isSame ? timeArray : await file.find(layout.channel.array);
  const time = placeColumn(timeArray, layout.time, 'time');
  const channel = placeColumn(channelArray, layout.channel, 'channel');
  const records = time.rows;
  if (channel.rows !== records) {
    throw new Problem(
      'wrong-length',
      `Expected as many channels as times, found ${channel.rows} channels in ${arrayName(channelArray)} and ${records} times in ${arrayName(timeArray)}; point to arrays of one acquisition.`,
      channelArray.place,
    );
  }
  // Opened once and kept: a deflated column goes on where the last range ended.
  const columns = await openColumns([time, channel]);
  return {
    facts: { kind: 'tags', records, tickFs: layout.tickFs, reader: 'npy' },
    tickOffsetAt: async () => 0n,
    read: (range, tickOffset, token) =>
      readTags(
        source,
        columns,
        time,
        channel,
        assertRange(range, records, 'records', source.name),
        tickOffset,
        token,
      ),
    close: () => source.close(),
  };
}

async function* readTags(
  source: ByteSource,
  columns: ColumnReader,
  time: ColumnPlace,
  channel: ColumnPlace,
  range: ReadRange,
  tickOffset: bigint,
  token: CancelToken,
): AsyncGenerator<TagBlock> {
  const rows = Math.max(
    1,
    Math.min(mostRecords, Math.floor(mostBytes / Math.max(time.stride, channel.stride))),
  );
  for (let first = range.start; first < range.end; first += rows) {
    await passTurn(token);
    const end = Math.min(first + rows, range.end);
    const [timeColumn, channelColumn] = (await columns.read(first, end, token)) as [Uint8Array, Uint8Array];
    assertColumn(timeColumn, time, 'time', first);
    assertColumn(channelColumn, channel, 'channel', first);
    const channels = ownedChannels(channelColumn, channel, first);
    for (let start = 0; start < end - first; ) {
      const ticks = ticksOf(timeColumn, time.number, start);
      yield {
        kind: 'tags',
        firstRecord: first + start,
        records: ticks.end - start,
        baseTick: ticks.baseTick + tickOffset,
        deltaTick: ticks.deltaTick,
        // A copy where the block is a part: each block owns its memory, so that it can be transferred.
        channel: ticks.end - start === channels.length ? channels : channels.slice(start, ticks.end),
        count: ticks.end - start,
        bytes: bytesOfRange(source.size, first + start, first + ticks.end, time.rows),
      };
      start = ticks.end;
    }
  }
}

function assertColumn(column: Uint8Array, place: ColumnPlace, role: string, first: number): void {
  if (place.number.family !== 'float') return;
  const values = viewNumbers(column, place.number);
  if (values instanceof Float32Array || values instanceof Float64Array) {
    assertWhole(values, role, first, place.array.place);
  }
}

function ownedChannels(column: Uint8Array, { number, array }: ColumnPlace, first: number): Uint16Array {
  return channelsOf(column, number, first, array.place);
}
