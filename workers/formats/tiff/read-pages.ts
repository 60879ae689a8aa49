import type { ByteSource, CancelToken } from '../../../shared/contracts/reader';
import { swapBytes } from '../gather';
import { passTurn } from '../turn';
import type { Geometry } from './geometry';
import { damaged, type PageParts, storedRows } from './parts';
import { settleSamples } from './predictor';
import { Unpackable, unpackPart } from './unpack';

/** Parts no further apart than this are read together, up to so much at once. */
const gapBytes = 2 ** 13;
const spanBytes = 2 ** 24;
/** Unpacked between two looks at the cancel flag. */
const turnBytes = 2 ** 22;

interface Span {
  start: number;
  end: number;
  parts: { page: PageParts; part: number }[];
}

/** The pages, one after the other, as packed little-endian samples. */
export async function readPages(
  source: ByteSource,
  geometry: Geometry,
  pages: readonly PageParts[],
  token: CancelToken,
): Promise<Uint8Array> {
  const spans = planSpans(pages);
  const whole = isPlain(geometry) && spans.length === 1 && isGapless(spans[0]!) ? spans[0]! : null;
  if (whole !== null) {
    const bytes = await readSpan(source, whole);
    return geometry.isLittle ? bytes : swapBytes(bytes, geometry.number.bytes);
  }
  const { frameBytes } = geometry;
  const into = new Uint8Array(pages.length * frameBytes);
  let sinceTurn = 0;
  for (const span of spans) {
    const bytes = await readSpan(source, span);
    for (const { page, part } of span.parts) {
      const offset = page.offsets[part]! - span.start;
      const at = page.page - pages[0]!.page;
      const frame = into.subarray(at * frameBytes, (at + 1) * frameBytes);
      placePart(source, geometry, page, part, bytes.subarray(offset, offset + page.counts[part]!), frame);
      sinceTurn += frameBytes / geometry.parts;
      if (sinceTurn < turnBytes) continue;
      sinceTurn = 0;
      await passTurn(token);
    }
  }
  return into;
}

function isPlain({ compression, isTiled }: Geometry): boolean {
  return compression === 'none' && !isTiled;
}

function isGapless({ start, end, parts }: Span): boolean {
  return parts.reduce((sum, { page, part }) => sum + page.counts[part]!, 0) === end - start;
}

/** Spans of the file that hold the parts in their order; a part before its forerunner starts a new one. */
function planSpans(pages: readonly PageParts[]): Span[] {
  const spans: Span[] = [];
  for (const page of pages) {
    for (let part = 0; part < page.offsets.length; part += 1) {
      const start = page.offsets[part]!;
      const end = start + page.counts[part]!;
      const last = spans.at(-1);
      const isNear = last !== undefined && start >= last.end && start - last.end <= gapBytes;
      if (last !== undefined && isNear && end - last.start <= spanBytes) {
        last.end = end;
        last.parts.push({ page, part });
      } else {
        spans.push({ start, end, parts: [{ page, part }] });
      }
    }
  }
  return spans;
}

async function readSpan(source: ByteSource, { start, end, parts }: Span): Promise<Uint8Array> {
  const bytes = await source.read(start, end);
  if (bytes.length === end - start) return bytes;
  throw damaged(source, parts[0]!.page.page, `${bytes.length} of ${end - start} bytes at byte ${start}`);
}

function placePart(
  source: ByteSource,
  geometry: Geometry,
  { page }: PageParts,
  part: number,
  packed: Uint8Array,
  frame: Uint8Array,
): void {
  const { partWidth, partHeight, partsAcross, width, height, number } = geometry;
  const rows = storedRows(geometry, part);
  const across = part % partsAcross;
  const top = ((part - across) / partsAcross) * partHeight;
  const left = across * partWidth;
  const unpacked = new Uint8Array(rows * partWidth * number.bytes);
  try {
    unpackPart(packed, geometry.compression, unpacked);
  } catch (thrown) {
    if (!(thrown instanceof Unpackable)) throw thrown;
    throw damaged(source, page, thrown.message);
  }
  const samples = settleSamples(unpacked, geometry, partWidth);
  const rowBytes = width * number.bytes;
  const partRowBytes = partWidth * number.bytes;
  if (partWidth === width) {
    frame.set(samples.subarray(0, Math.min(rows, height - top) * rowBytes), top * rowBytes);
    return;
  }
  const shownBytes = Math.min(partWidth, width - left) * number.bytes;
  for (let y = 0; y < rows && top + y < height; y += 1) {
    const row = samples.subarray(y * partRowBytes, y * partRowBytes + shownBytes);
    frame.set(row, (top + y) * rowBytes + left * number.bytes);
  }
}
