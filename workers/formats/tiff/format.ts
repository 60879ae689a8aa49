import type { Inspection } from '../../../shared/contracts/engine';
import type { Layout, TiffLayout } from '../../../shared/contracts/layout';
import type { ByteSource, Format } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { summariseFrames } from '../frame-summary';
import { isCutTiffHead, parseTiffHead } from './directory';
import { type OpenTiff, openTiff } from './frames-reader';

const layoutOfAll: TiffLayout = { version: 1, format: 'tiff', kind: 'frames' };

/** TIFF and BigTIFF: every page is a frame of grey values. */
export const tiffFormat: Format = {
  id: 'tiff',
  sniff: (head) => (parseTiffHead(head) !== null || isCutTiffHead(head) ? 1 : 0),
  inspect: async (source, layout) => {
    if (layout !== null) assertLayout(source, layout);
    return inspectPages(source, await openTiff(source), layout !== null);
  },
  open: async (source, layout) => {
    assertLayout(source, layout);
    return (await openTiff(source)).reader;
  },
};

function assertLayout({ name }: ByteSource, { format }: Layout): void {
  if (format === 'tiff') return;
  throw new Problem(
    'bad-layout',
    `${name} is TIFF, but the layout describes ${format}; choose the layout of TIFF.`,
    name,
  );
}

async function inspectPages(source: ByteSource, tiff: OpenTiff, isGiven: boolean): Promise<Inspection> {
  const { facts } = tiff.reader;
  if (facts.kind !== 'frames') throw new Problem('internal', 'Pages are frames.', source.name);
  const { frames, width, height, type } = facts;
  const { geometry, pages, tags } = tiff.index;
  const kind = tiff.isBig ? 'BigTIFF' : 'TIFF';
  const packing =
    geometry.compression === 'none' ? 'not compressed' : `compressed by ${geometry.compression}`;
  const told = frames > pages ? ', as the description of its only page says' : '';
  const { facts: summary, warnings } = await summariseFrames(tiff.reader, facts);
  const turned =
    tags.orientation === 1
      ? []
      : [
          `The pages say that they are to be turned or flipped (orientation ${tags.orientation}); they are read as stored.`,
        ];
  return {
    fileName: source.name,
    bytes: source.size,
    layout: layoutOfAll,
    because: isGiven
      ? 'The layout was given.'
      : `${kind} of ${frames} frames of ${width} x ${height} pixels of ${type}, ${packing}${told}.`,
    warnings: [...turned, ...warnings],
    reader: 'tiff',
    facts: summary,
    datasets: [],
  };
}
