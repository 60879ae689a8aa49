import type { DatasetFact, Inspection, InspectionFacts } from '../../../shared/contracts/engine';
import type { Layout } from '../../../shared/contracts/layout';
import type { ByteSource, Format, Reader } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { summariseFrames } from '../frame-summary';
import { summariseTags } from '../tag-summary';
import { openFrames } from './frames-reader';
import { openTree } from './open-tree';
import { proposeHdf5 } from './propose';
import { findSuperblock, isCutSignature } from './superblock';
import { openTags } from './tags-reader';
import { type Hdf5Tree, typeName } from './tree';

/** Tags looked at by an inspection. */
const inspectedRecords = 2 ** 18;

/** HDF5: time tags as columns of integers, frames as a 3-D dataset. */
export const hdf5Format: Format = {
  id: 'hdf5',
  sniff: (head) => (findSuperblock(head) >= 0 || isCutSignature(head) ? 1 : 0),
  inspect: async (source, layout, environment) => {
    const tree = await openTree(source, environment);
    try {
      return await inspectTree(tree, source, layout);
    } finally {
      tree.close();
    }
  },
  open: async (source, layout, environment) => {
    const tree = await openTree(source, environment);
    try {
      return openLayout(tree, source, layout);
    } catch (thrown) {
      tree.close();
      throw thrown;
    }
  },
};

/** Which reader reads it, and why that one. */
const readerWords: Record<Hdf5Tree['reader'], string> = {
  jsfive:
    'The file is small and of the first kind of HDF5, which the light reader (jsfive) is proved to read exactly.',
  h5wasm: 'The library of HDF5 itself (h5wasm) reads it.',
};

function openLayout(tree: Hdf5Tree, source: ByteSource, layout: Layout): Reader {
  if (layout.format !== 'hdf5') {
    throw new Problem(
      'bad-layout',
      `${source.name} is HDF5, but the layout describes ${layout.format}; choose a layout of datasets.`,
      source.name,
    );
  }
  return layout.kind === 'tags' ? openTags(tree, source, layout) : openFrames(tree, source, layout);
}

async function inspectTree(tree: Hdf5Tree, source: ByteSource, given: Layout | null): Promise<Inspection> {
  const { layout, because, warnings } =
    given === null ? proposeHdf5(tree) : { layout: given, because: 'The layout was given.', warnings: [] };
  const inspection: Inspection = {
    fileName: source.name,
    bytes: source.size,
    layout,
    because: `${because} ${readerWords[tree.reader]}`,
    warnings: [...outsideWarnings(tree), ...warnings],
    reader: tree.reader,
    facts: { kind: 'none' },
    datasets: datasetFacts(tree),
  };
  if (layout === null) return inspection;
  try {
    const { facts, warnings: found } = await summarise(openLayout(tree, source, layout));
    return { ...inspection, facts, warnings: [...inspection.warnings, ...found] };
  } catch (thrown) {
    // A proposal that fails is still shown, so that it can be corrected; a layout that was asked for is refused.
    if (given !== null || !(thrown instanceof Problem)) throw thrown;
    return { ...inspection, warnings: [...inspection.warnings, thrown.message] };
  }
}

async function summarise(reader: Reader): Promise<{ facts: InspectionFacts; warnings: string[] }> {
  const { facts } = reader;
  if (facts.kind === 'frames') return summariseFrames(reader, facts);
  return summariseTags(reader, facts.records, facts.tickFs, inspectedRecords);
}

function outsideWarnings(tree: Hdf5Tree): string[] {
  const links = tree.outside.map(
    ({ path, fileName }) => `${path} is a link into another file ("${fileName}"), which is not followed.`,
  );
  const refused = tree.datasets.flatMap(({ path, refusal }) =>
    refusal === null ? [] : [`${path} ${refusal}.`],
  );
  return [...links, ...refused].slice(0, 10);
}

function datasetFacts(tree: Hdf5Tree): DatasetFact[] {
  return tree.datasets.map(({ path, shape, type }) => ({
    path,
    shape,
    type: typeName(type),
    fields: type.kind === 'compound' ? type.members.map(({ name }) => name) : [],
  }));
}
