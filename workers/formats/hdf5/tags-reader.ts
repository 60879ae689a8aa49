import type { TagBlock } from '../../../shared/contracts/blocks';
import type { Hdf5TagsLayout } from '../../../shared/contracts/layout';
import type { ByteSource, CancelToken, Reader, ReadRange } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { assertRange, bytesOfRange } from '../ranges';
import { channelsOf, ticksOf } from '../tag-columns';
import { passTurn } from '../turn';
import { nextEnd } from './chunks';
import { type ColumnPlace, gatherColumn, placeColumn } from './columns';
import type { Hdf5Tree } from './tree';

/** Records a block: at most a million, and rows of at most 16 MiB. */
const mostRecords = 2 ** 20;
const mostBytes = 2 ** 24;

/** Tags of two columns of integers. Their times are absolute, so that ranges need no offset. */
export function openTags(tree: Hdf5Tree, source: ByteSource, layout: Hdf5TagsLayout): Reader {
  const time = placeColumn(tree, layout.time, 'time', source.name);
  const channel = placeColumn(tree, layout.channel, 'channel', source.name);
  if (time.rows !== channel.rows) {
    throw new Problem(
      'wrong-length',
      `Expected as many channels as times, found ${channel.rows} channels in ${channel.dataset.path} and ${time.rows} times in ${time.dataset.path}; point to datasets of one acquisition.`,
      `${source.name}, ${channel.dataset.path}`,
    );
  }
  const records = time.rows;
  return {
    facts: { kind: 'tags', records, tickFs: layout.tickFs, reader: tree.reader },
    tickOffsetAt: async () => 0n,
    read: (range, tickOffset, token) =>
      readTags(
        tree,
        source,
        { time, channel },
        assertRange(range, records, 'records', source.name),
        tickOffset,
        token,
      ),
    close: async () => {
      tree.close();
      await source.close();
    },
  };
}

async function* readTags(
  tree: Hdf5Tree,
  source: ByteSource,
  { time, channel }: { time: ColumnPlace; channel: ColumnPlace },
  range: ReadRange,
  tickOffset: bigint,
  token: CancelToken,
): AsyncGenerator<TagBlock> {
  const total = time.rows;
  const rows = Math.max(
    1,
    Math.min(mostRecords, Math.floor(mostBytes / Math.max(time.rowBytes, channel.rowBytes))),
  );
  for (let first = range.start; first < range.end; ) {
    await passTurn(token);
    const end = nextEnd(first, range.end, rows, time.dataset.chunkRows);
    const timeRows = tree.readRows(time.dataset, first, end);
    const channelRows =
      channel.dataset.path === time.dataset.path ? timeRows : tree.readRows(channel.dataset, first, end);
    const timeColumn = gatherColumn(timeRows, time);
    const channels = channelsOf(
      gatherColumn(channelRows, channel),
      channel.number,
      first,
      `${source.name}, ${channel.dataset.path}`,
    );
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
        bytes: bytesOfRange(source.size, first + start, first + ticks.end, total),
      };
      start = ticks.end;
    }
    first = end;
  }
}
