import { isTextLike, isUtf16 } from './text-like';

const magics: { bytes: number[]; what: string; wayOut: string }[] = [
  { bytes: [0x1f, 0x8b, 0x08], what: 'a gzip archive', wayOut: 'unpack it first' },
  { bytes: [0x28, 0xb5, 0x2f, 0xfd], what: 'a zstd archive', wayOut: 'unpack it first' },
  { bytes: [0xfd, 0x37, 0x7a, 0x58, 0x5a], what: 'an xz archive', wayOut: 'unpack it first' },
  { bytes: [0x89, 0x50, 0x4e, 0x47], what: 'a PNG picture', wayOut: 'choose the raw data it was made from' },
  { bytes: [0xff, 0xd8, 0xff], what: 'a JPEG picture', wayOut: 'choose the raw data it was made from' },
  { bytes: [0x25, 0x50, 0x44, 0x46], what: 'a PDF document', wayOut: 'choose the raw data instead' },
];

/** What bytes that are no acquisition look like, and the way out; null when they look like nothing known. */
export function lookAt(head: Uint8Array): { what: string; wayOut: string } | null {
  for (const { bytes, what, wayOut } of magics) {
    if (bytes.every((byte, at) => head[at] === byte)) return { what, wayOut };
  }
  if (isUtf16(head)) return { what: 'text in UTF-16', wayOut: 'save it as UTF-8 and choose that file' };
  if (!isTextLike(head)) return null;
  return {
    what: describeText(head),
    wayOut:
      'choose the file that the acquisition wrote: text is read where lines hold a time and a channel in columns',
  };
}

function describeText(head: Uint8Array): string {
  const text = new TextDecoder().decode(head.subarray(0, 4096)).trimStart();
  const firstLine = text.split(/[\r\n]/, 1)[0] ?? '';
  const shown = firstLine.length > 40 ? `${firstLine.slice(0, 40)}…` : firstLine;
  const kind = /^[[{]/.test(text)
    ? 'JSON text'
    : /^<(!doctype|\?xml|html)/i.test(text)
      ? 'a web page'
      : 'text';
  return `${kind} beginning "${shown}"`;
}
