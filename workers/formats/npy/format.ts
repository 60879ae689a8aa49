import type { DatasetFact, Inspection, InspectionFacts } from '../../../shared/contracts/engine';
import type { Layout } from '../../../shared/contracts/layout';
import type { ByteSource, Format, Reader } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { summariseFrames } from '../frame-summary';
import { summariseTags } from '../tag-summary';
import { type ArrayFile, type FoundArray, openArrayFile } from './arrays';
import { typeName } from './element-type';
import { openFrames } from './frames-reader';
import { hasMagic, isCutMagic } from './header';
import { proposeNpy } from './propose';
import { placeStack } from './stack';
import { countPasses } from './strided-frames';
import { openTags } from './tags-reader';

/** Tags looked at by an inspection. */
const inspectedRecords = 2 ** 18;

/** Arrays of NumPy: an NPY file or an NPZ archive. The one array of an NPY file is the dataset "". */
export const npyFormat: Format = {
  id: 'npy',
  sniff: (head) => {
    if (hasMagic(head) || isCutMagic(head)) return 1;
    const isZip = head[0] === 0x50 && head[1] === 0x4b && (head[2] === 3 || head[2] === 5);
    // An archive of anything else is told what was expected when its directory is read.
    return isZip ? (namesArray(head) ? 1 : 0.6) : 0;
  },
  inspect: async (source, layout) => {
    const file = await openArrayFile(source);
    const { found, left } = await file.list();
    return inspectArrays(source, file, found, left, layout);
  },
  open: async (source, layout) => openLayout(source, await openArrayFile(source), layout),
};

/** Whether the first member of the archive is named like an array. */
function namesArray(head: Uint8Array): boolean {
  const nameBytes = (head[26] ?? 0) + 256 * (head[27] ?? 0);
  const ending = String.fromCharCode(...head.subarray(26 + nameBytes, 30 + nameBytes));
  return nameBytes >= 4 && ending === '.npy';
}

async function openLayout(source: ByteSource, file: ArrayFile, layout: Layout): Promise<Reader> {
  if (layout.format !== 'npy') {
    throw new Problem(
      'bad-layout',
      `${source.name} holds arrays of NumPy, but the layout describes ${layout.format}; choose a layout of arrays.`,
      source.name,
    );
  }
  return layout.kind === 'tags' ? openTags(source, file, layout) : openFrames(source, file, layout);
}

async function inspectArrays(
  source: ByteSource,
  file: ArrayFile,
  found: readonly FoundArray[],
  left: number,
  given: Layout | null,
): Promise<Inspection> {
  const proposal =
    given === null
      ? await proposeNpy(found, file.isArchive)
      : { layout: given, because: 'The layout was given.', warnings: [] };
  const { layout, because } = proposal;
  const inspection: Inspection = {
    fileName: source.name,
    bytes: source.size,
    layout,
    because,
    warnings: [...warningsOf(found, left), ...proposal.warnings],
    reader: 'npy',
    facts: { kind: 'none' },
    datasets: datasetFacts(found),
  };
  if (layout === null) return inspection;
  try {
    const { facts, warnings } = await summarise(source, file, layout);
    return { ...inspection, facts, warnings: [...inspection.warnings, ...warnings] };
  } catch (thrown) {
    // A proposal that fails is still shown, so that it can be corrected; a layout that was asked for is refused.
    if (given !== null || !(thrown instanceof Problem)) throw thrown;
    return { ...inspection, warnings: [...inspection.warnings, thrown.message] };
  }
}

async function summarise(
  source: ByteSource,
  file: ArrayFile,
  layout: Layout,
): Promise<{ facts: InspectionFacts; warnings: string[] }> {
  const reader = await openLayout(source, file, layout);
  const { facts } = reader;
  if (facts.kind === 'tags') return summariseTags(reader, facts.records, facts.tickFs, inspectedRecords);
  const summary = await summariseFrames(reader, facts);
  const slow = layout.format === 'npy' && layout.kind === 'frames' ? await slowness(file, layout.array) : [];
  return { ...summary, warnings: [...slow, ...summary.warnings] };
}

async function slowness(file: ArrayFile, name: string | undefined): Promise<string[]> {
  const array = await file.find(name);
  if (!array.isFortran) return [];
  const passes = countPasses(placeStack(array));
  const times = passes === 1 ? 'one reading' : `${passes} readings`;
  return [
    `The array is stored in Fortran order: its frames take ${times} of the whole array in each worker; numpy.ascontiguousarray before saving makes it quick.`,
  ];
}

function warningsOf(found: readonly FoundArray[], left: number): string[] {
  const warnings = found.flatMap((each) => {
    if ('problem' in each) return [each.problem.message];
    const { place, trailingBytes } = each.array;
    return trailingBytes === 0
      ? []
      : [`${place} holds ${trailingBytes} bytes after its array, which are not read.`];
  });
  if (left > 0) warnings.push(`${left} more arrays were not looked into.`);
  return warnings.slice(0, 10);
}

function datasetFacts(found: readonly FoundArray[]): DatasetFact[] {
  return found.flatMap((each) => {
    if (!('array' in each)) return [];
    const { type, shape } = each.array;
    const fields = type.kind === 'fields' ? type.fields.map(({ name }) => name) : [];
    return [{ path: each.name, shape, type: typeName(type), fields }];
  });
}
