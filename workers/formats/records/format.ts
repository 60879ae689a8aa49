import type { Inspection } from '../../../shared/contracts/engine';
import type { RecordsLayout } from '../../../shared/contracts/layout';
import type { ByteSource, Format } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { summariseTags } from '../tag-summary';
import { isTextLike } from '../text-like';
import { countRecords, planRecords } from './plan';
import { proposalBytes, proposeRecords } from './propose';
import { openRecords, recordsReader } from './reader';

/** Records looked at by an inspection: 1 to 4 MiB. */
const inspectedRecords = 2 ** 18;

/** Fixed-width binary records. Any binary bytes may be such, so it is sure of nothing and rules out only text. */
export const recordsFormat: Format = {
  id: 'records',
  sniff: (head) => (head.length === 0 || isTextLike(head) ? 0 : 0.2),
  inspect: async (source, layout) => {
    if (layout === null) return inspectUnknown(source);
    if (layout.format !== 'records') throw wrongFormat(layout.format, source.name);
    return inspectAs(source, layout, 'The layout was given.', []);
  },
  open: async (source, layout, environment) => {
    if (layout.format !== 'records') throw wrongFormat(layout.format, source.name);
    return openRecords(source, layout, environment.records);
  },
};

async function inspectUnknown(source: ByteSource): Promise<Inspection> {
  const proposal = proposeRecords(await source.read(0, proposalBytes), source.size);
  if (proposal !== null) return inspectAs(source, proposal.layout, proposal.because, proposal.warnings);
  return {
    fileName: source.name,
    bytes: source.size,
    layout: null,
    because:
      'No common record length has a field that rises like time beside one of few values like a channel; describe the records.',
    warnings: [],
    reader: 'records',
    facts: { kind: 'none' },
    datasets: [],
  };
}

/** A file of the wrong length is still shown, with what is wrong, so that the layout can be corrected; opening refuses it. */
async function inspectAs(
  source: ByteSource,
  layout: RecordsLayout,
  because: string,
  known: string[],
): Promise<Inspection> {
  const plan = planRecords(layout);
  const warnings = [...known];
  let records = Math.max(0, Math.floor((source.size - plan.headerBytes) / plan.recordBytes));
  try {
    records = countRecords(plan, source.size, source.name);
  } catch (thrown) {
    if (!(thrown instanceof Problem) || thrown.code !== 'wrong-length') throw thrown;
    warnings.push(thrown.message);
  }
  const reader = recordsReader(source, plan, records, layout.tickFs);
  const summary = await summariseTags(reader, records, layout.tickFs, inspectedRecords);
  return {
    fileName: source.name,
    bytes: source.size,
    layout,
    because,
    warnings: [...warnings, ...summary.warnings],
    reader: 'records',
    facts: summary.facts,
    datasets: [],
  };
}

function wrongFormat(found: string, name: string): Problem {
  return new Problem(
    'bad-layout',
    `Expected a layout of records for ${name}, found one of ${found}; choose another.`,
    name,
  );
}
