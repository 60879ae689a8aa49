import type { Inspection } from '../../../shared/contracts/engine';
import type { Layout, TextLayout } from '../../../shared/contracts/layout';
import type { ByteSource, Format } from '../../../shared/contracts/reader';
import { Problem } from '../../../shared/errors/problem';
import { summariseTags } from '../tag-summary';
import { isUtf16 } from '../text-like';
import { proposeText } from './propose';
import { openText } from './reader';
import { sampleText } from './sample';

const headBytes = 2 ** 16;
/** Lines looked at by an inspection. */
const inspectedLines = 2 ** 17;

/** One tag a line, columns of decimal numbers. Text with two columns of numbers is hardly anything else. */
export const textFormat: Format = {
  id: 'text',
  sniff: (head, { size }) => (sampleText(head, size <= head.length) === null ? 0 : 0.9),
  inspect: async (source, layout) => {
    if (layout === null) return inspectUnknown(source);
    return inspectAs(source, textLayout(layout, source.name), 'The layout was given.', []);
  },
  open: async (source, layout) => {
    const text = textLayout(layout, source.name);
    assertText(await source.read(0, headBytes), source.name);
    return openText(source, text);
  },
};

async function inspectUnknown(source: ByteSource): Promise<Inspection> {
  const sample = sampleText(await source.read(0, headBytes), source.size <= headBytes);
  const proposal = sample === null ? null : proposeText(sample);
  if (proposal !== null) return inspectAs(source, proposal.layout, proposal.because, proposal.warnings);
  return {
    fileName: source.name,
    bytes: source.size,
    layout: null,
    because:
      'No column of the text rises like time beside one of few whole numbers like a channel; describe the columns.',
    warnings: [],
    reader: 'text',
    facts: { kind: 'none' },
    datasets: [],
  };
}

async function inspectAs(
  source: ByteSource,
  layout: TextLayout,
  because: string,
  known: string[],
): Promise<Inspection> {
  assertText(await source.read(0, headBytes), source.name);
  const reader = await openText(source, layout);
  const records = reader.facts.kind === 'tags' ? reader.facts.records : 0;
  const summary = await summariseTags(reader, records, layout.tickFs, inspectedLines);
  return {
    fileName: source.name,
    bytes: source.size,
    layout,
    because,
    warnings: [...known, ...summary.warnings],
    reader: 'text',
    facts: summary.facts,
    datasets: [],
  };
}

/** Zero bytes never occur in text; anything else is judged line by line, with its place. */
function assertText(head: Uint8Array, name: string): void {
  const zero = head.indexOf(0);
  if (zero < 0) return;
  if (isUtf16(head)) {
    throw new Problem(
      'not-this-format',
      `Expected text in UTF-8 in ${name}, found UTF-16; save it as UTF-8 and choose that file.`,
      `${name}, byte 0`,
    );
  }
  throw new Problem(
    'not-this-format',
    `Expected text in ${name}, as the layout says, found binary bytes; choose a layout of binary records, or another file.`,
    `${name}, byte ${zero}`,
  );
}

function textLayout(layout: Layout, name: string): TextLayout {
  if (layout.format === 'text') return layout;
  throw new Problem(
    'bad-layout',
    `Expected a layout of text for ${name}, found one of ${layout.format}; choose another.`,
    name,
  );
}
