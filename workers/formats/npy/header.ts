import { Problem } from '../../../shared/errors/problem';
import { type ElementType, ObjectsFound, parseElementType } from './element-type';
import { type Literal, parseLiteral } from './literal';

/** \x93NUMPY (numpy.lib.format, "Format Version 1.0"). */
const magic = [0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59];

export function hasMagic(head: Uint8Array): boolean {
  return magic.every((byte, at) => head[at] === byte);
}

/** A file so short that only part of the magic is there. */
export function isCutMagic(head: Uint8Array): boolean {
  return head.length >= 3 && head.length < magic.length && head.every((byte, k) => byte === magic[k]);
}

export interface ArrayHeader {
  shape: number[];
  /** First index fastest, as Fortran and MATLAB store. */
  isFortran: boolean;
  type: ElementType;
  /** Bytes of magic, version, length and header before the first element. */
  dataStart: number;
  dataBytes: number;
}

/** Longer headers than NumPy itself takes without being asked (10 000) are read, but not without bound. */
const mostHeaderBytes = 2 ** 20;
const mostDimensions = 32;

export interface HeaderSource {
  name: string;
  /** Of the NPY file or of the unpacked member of an archive. */
  size: number;
  read(start: number, end: number): Promise<Uint8Array>;
}

/**
 * The header of an NPY file, versions 1.0, 2.0 and 3.0. Throws `not-this-format`, `truncated`, `newer-version`,
 * `unsupported` (Python objects) and `unreadable`.
 */
export async function readHeader(source: HeaderSource): Promise<ArrayHeader> {
  const head = await source.read(0, 12);
  if (!hasMagic(head)) {
    throw new Problem(
      'not-this-format',
      `Expected an array of NumPy in ${source.name}, found other bytes; save it by numpy.save or numpy.savez.`,
      `${source.name}, byte 0`,
    );
  }
  const version = head[6] ?? 1;
  if (version < 1 || version > 3 || (head[7] ?? 0) !== 0) {
    throw new Problem(
      'newer-version',
      `Expected version 1.0, 2.0 or 3.0 of the NPY format in ${source.name}, found ${version}.${head[7]}; save it again by numpy.save.`,
      `${source.name}, byte 6`,
    );
  }
  const lengthAt = 8;
  const textStart = version === 1 ? 10 : 12;
  if (head.length < textStart) throw cut(source, head.length, `a header of ${textStart} bytes or more`);
  const view = new DataView(head.buffer, head.byteOffset, head.length);
  const textBytes = version === 1 ? view.getUint16(lengthAt, true) : view.getUint32(lengthAt, true);
  const dataStart = textStart + textBytes;
  if (textBytes > mostHeaderBytes) {
    throw bad(source, `a header of at most ${mostHeaderBytes} bytes`, `one of ${textBytes}`, lengthAt);
  }
  const bytes = await source.read(textStart, dataStart);
  if (bytes.length < textBytes) throw cut(source, textStart + bytes.length, `a header of ${dataStart} bytes`);
  const text = new TextDecoder(version === 3 ? 'utf-8' : 'latin1').decode(bytes);
  return { ...parseHeader(source, text, textStart), dataStart };
}

function parseHeader(source: HeaderSource, text: string, at: number): Omit<ArrayHeader, 'dataStart'> {
  try {
    const header = parseLiteral(text);
    if (!(header instanceof Map)) throw new SyntaxError('expected a dictionary');
    const shape = shapeOf(header.get('shape'));
    const isFortran = header.get('fortran_order');
    if (typeof isFortran !== 'boolean') throw new SyntaxError('expected "fortran_order" as True or False');
    const type = parseElementType(header.get('descr') ?? null);
    const dataBytes = shape.reduce((product, size) => product * size, type.bytes);
    if (!Number.isSafeInteger(dataBytes)) throw new SyntaxError('expected less than 2^53 bytes of data');
    return { shape, isFortran, type, dataBytes };
  } catch (thrown) {
    if (thrown instanceof ObjectsFound) {
      throw new Problem(
        'unsupported',
        `${source.name} holds Python objects, which are pickled and never unpacked here; save whole numbers, for example by array.astype("int64").`,
        `${source.name}, byte ${at}`,
      );
    }
    if (!(thrown instanceof SyntaxError)) throw thrown;
    throw bad(source, 'the header of an array of NumPy', `one that cannot be read (${thrown.message})`, at);
  }
}

function shapeOf(shape: Literal | undefined): number[] {
  if (!Array.isArray(shape) || shape.length > mostDimensions)
    throw new SyntaxError('expected "shape" as a tuple');
  return shape.map((size) => {
    if (typeof size !== 'number' || size < 0) throw new SyntaxError('expected a shape of whole numbers');
    return size;
  });
}

/** Throws `truncated` unless all elements are there. */
export function assertWhole(source: HeaderSource, { dataStart, dataBytes, shape }: ArrayHeader): void {
  if (source.size - dataStart >= dataBytes) return;
  throw cut(
    source,
    source.size,
    `${dataStart + dataBytes} bytes, as its header says (shape ${shape.join(' x ') || 'of a single value'})`,
  );
}

function cut({ name }: HeaderSource, found: number, expected: string): Problem {
  return new Problem(
    'truncated',
    `Expected ${name} to hold ${expected}, found ${found}; it was cut short, copy or save it again.`,
    `${name}, byte ${found}`,
  );
}

function bad({ name }: HeaderSource, expected: string, found: string, at: number): Problem {
  return new Problem(
    'unreadable',
    `Expected ${expected} in ${name}, found ${found}; save it again by numpy.save.`,
    `${name}, byte ${at}`,
  );
}
