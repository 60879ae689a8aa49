import type { Inspection } from '../../shared/contracts/engine';
import type { FormatId, Layout } from '../../shared/contracts/layout';
import type { ByteSource, Format, Reader, ReaderEnvironment } from '../../shared/contracts/reader';
import { Problem } from '../../shared/errors/problem';
import { hdf5Format } from './hdf5/format';
import { lookAt } from './look';
import { npyFormat } from './npy/format';
import { recordsFormat } from './records/format';
import { textFormat } from './text/format';
import { tiffFormat } from './tiff/format';

/** Every format that can be read. Adding one: a folder, a line here, a sample. */
export const formats: readonly Format[] = [hdf5Format, npyFormat, tiffFormat, textFormat, recordsFormat];

export function formatById(id: FormatId): Format {
  const format = formats.find((each) => each.id === id);
  if (!format) throw new Problem('bad-layout', `There is no format called "${id}".`, 'format');
  return format;
}

/** Bytes that a format is recognised by. */
const headBytes = 2 ** 16;
/** Shorter heads may read as text by chance. */
const tellingBytes = 64;

/**
 * What the bytes look like, with a layout proposed or the given one tried. The name of the file decides nothing: at most
 * it is remarked upon. Throws `empty-file`, `not-this-format`, and what the format throws.
 */
export async function inspectSource(
  source: ByteSource,
  layout: Layout | null,
  environment: ReaderEnvironment,
): Promise<Inspection> {
  const head = await readHead(source);
  const format = layout === null ? recognise(head, source) : agreeing(layout, head, source);
  const inspection = await format.inspect(source, layout, environment);
  const remark = nameRemark(source.name, format.id);
  return remark === null ? inspection : { ...inspection, warnings: [remark, ...inspection.warnings] };
}

/** Opens the source by its layout. Throws where the bytes contradict it. Closing the reader closes the source. */
export async function openReader(
  source: ByteSource,
  layout: Layout,
  environment: ReaderEnvironment,
): Promise<Reader> {
  const head = await readHead(source);
  return agreeing(layout, head, source).open(source, layout, environment);
}

async function readHead(source: ByteSource): Promise<Uint8Array> {
  if (source.size > 0) return source.read(0, headBytes);
  throw new Problem(
    'empty-file',
    `${source.name} holds no bytes; choose the file that the acquisition wrote.`,
    `${source.name}, byte 0`,
  );
}

/** The format that is surest of the bytes. */
function recognise(head: Uint8Array, source: ByteSource): Format {
  const look = lookAt(head);
  const ranked = formats
    .map((format) => ({ format, confidence: format.sniff(head, source) }))
    .sort((a, b) => b.confidence - a.confidence);
  const best = ranked[0];
  if (best && best.confidence > 0.5) return best.format;
  if (look !== null) throw foreign(source, 'time tags or frames', look);
  if (best && best.confidence > 0) return best.format;
  throw foreign(source, 'time tags or frames', { what: 'something unknown', wayOut: 'choose another file' });
}

/** The format of the layout, if the bytes allow it: a layout tried on foreign bytes would give numbers that mean nothing. */
function agreeing(layout: Layout, head: Uint8Array, source: ByteSource): Format {
  const format = formatById(layout.format);
  const surest = formats.find((each) => each.sniff(head, source) === 1);
  if (surest && surest !== format) {
    throw foreign(source, `${nameOf(layout.format)}, as the layout says`, {
      what: nameOf(surest.id),
      wayOut: `choose a layout of ${nameOf(surest.id)}`,
    });
  }
  const look = lookAt(head);
  // Records may read as text by chance while they are few; what lacks the signature of HDF5 is no HDF5 at any length.
  const isText = look !== null && (format.id === 'hdf5' || head.length >= tellingBytes);
  // What is described as text may be any: its reader names the line that does not fit.
  if (!surest && isText && format.id !== 'text' && format.sniff(head, source) === 0) {
    throw foreign(source, `${nameOf(layout.format)}, as the layout says`, look);
  }
  return format;
}

const names: Record<FormatId, string> = {
  hdf5: 'HDF5',
  records: 'binary records',
  npy: 'a NumPy array',
  tiff: 'a TIFF stack',
  text: 'columns of text',
};

const nameOf = (id: FormatId): string => names[id];

function foreign(
  source: ByteSource,
  expected: string,
  { what, wayOut }: { what: string; wayOut: string },
): Problem {
  return new Problem(
    'not-this-format',
    `Expected ${expected} in ${source.name}, found what looks like ${what}; ${wayOut}.`,
    `${source.name}, byte 0`,
  );
}

function nameRemark(name: string, found: FormatId): string | null {
  const isNamedHdf5 = /\.(h5|hdf5|hdf|he5)$/i.test(name);
  return isNamedHdf5 && found !== 'hdf5' ? `${name} is named like HDF5, but its bytes are not HDF5.` : null;
}
