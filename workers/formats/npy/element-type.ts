import { type NumberType, numberName } from '../numbers';
import type { Literal } from './literal';

/** A plain number as it lies in the file; `isBig`: most significant byte first. */
export interface StoredNumber {
  number: NumberType;
  isBig: boolean;
}

export interface Field {
  name: string;
  offset: number;
  /** Null when the field is no plain number. */
  stored: StoredNumber | null;
  typeName: string;
}

export type ElementType =
  | { kind: 'number'; stored: StoredNumber; bytes: number }
  | { kind: 'fields'; fields: Field[]; bytes: number }
  | { kind: 'other'; name: string; bytes: number };

/** Records longer than this are no tags, and a block of them would pass every bound. */
export const mostRecordBytes = 2 ** 16;

const kinds: Record<string, string> = {
  c: 'complex numbers',
  S: 'texts',
  a: 'texts',
  U: 'texts',
  V: 'raw bytes',
  M: 'dates',
  m: 'time spans',
};

/** Arrays of Python objects are pickled: to read them is to run what they say. */
export class ObjectsFound extends Error {}

/**
 * The element type that a `descr` of NumPy stands for (numpy.lib.format, `descr_to_dtype`). Throws a SyntaxError when it
 * is none, `ObjectsFound` when it holds Python objects anywhere.
 */
export function parseElementType(descr: Literal): ElementType {
  if (typeof descr === 'string') return parseCode(descr);
  if (!Array.isArray(descr)) throw new SyntaxError('expected a type in "descr"');
  if (typeof descr[0] === 'string') return parseSubarray(descr);
  return parseFields(descr);
}

function parseCode(code: string): ElementType {
  const parts = /^([<>|])([biufcSaUVMmO])(\d{0,9})(\[\w+\])?$/.exec(code);
  if (parts === null) throw new SyntaxError(`expected a type of NumPy, found "${code}"`);
  const [, order, kind, digits] = parts as unknown as [string, string, string, string];
  if (kind === 'O') throw new ObjectsFound();
  const bytes = Number(digits) * (kind === 'U' ? 4 : 1);
  const isBig = order === '>';
  const family = kind === 'i' ? 'int' : kind === 'f' ? 'float' : kind === 'u' || kind === 'b' ? 'uint' : null;
  if (family === null) return { kind: 'other', name: kinds[kind]!, bytes };
  const sizes = kind === 'b' ? [1] : kind === 'f' ? [2, 4, 8] : [1, 2, 4, 8];
  if (sizes.includes(bytes)) {
    return { kind: 'number', stored: { number: { family, bytes }, isBig }, bytes };
  }
  if (kind === 'f' && bytes > 8) return { kind: 'other', name: `numbers of ${8 * bytes} bits`, bytes };
  throw new SyntaxError(`expected a type of NumPy, found "${code}"`);
}

/** (base type, shape) */
function parseSubarray(descr: Literal[]): ElementType {
  const [base, shape] = descr as [Literal, Literal];
  const sizes = typeof shape === 'number' ? [shape] : shape;
  if (descr.length !== 2 || !Array.isArray(sizes)) throw new SyntaxError('expected a type and a shape');
  const bytes = sizes.reduce<number>((product, size) => {
    if (typeof size !== 'number' || size < 0) throw new SyntaxError('expected a shape of whole numbers');
    return product * size;
  }, parseElementType(base).bytes);
  return { kind: 'other', name: 'arrays in each record', bytes: checkedBytes(bytes) };
}

function parseFields(descr: Literal[]): ElementType {
  const fields: Field[] = [];
  let offset = 0;
  for (const part of descr) {
    if (!Array.isArray(part) || part.length < 2 || part.length > 3) {
      throw new SyntaxError('expected fields as (name, type)');
    }
    const [title, base, shape] = part as [Literal, Literal, Literal | undefined];
    // A field with a title is named by the second of a pair.
    const name = Array.isArray(title) ? title[1] : title;
    if (typeof name !== 'string') throw new SyntaxError('expected the name of a field');
    const type = shape === undefined ? parseElementType(base) : parseSubarray([base, shape]);
    // Fields without a name are the padding of aligned types.
    if (name !== '') {
      const stored = type.kind === 'number' ? type.stored : null;
      fields.push({ name, offset, stored, typeName: typeName(type) });
    }
    offset = checkedBytes(offset + type.bytes);
  }
  return { kind: 'fields', fields, bytes: offset };
}

function checkedBytes(bytes: number): number {
  if (bytes < 2 ** 31) return bytes;
  throw new SyntaxError('expected an element of less than 2 GiB');
}

export function typeName(type: ElementType): string {
  if (type.kind === 'number') return numberName(type.stored.number);
  if (type.kind === 'other') return type.name;
  return `compound{${type.fields.map((field) => `${field.name}:${field.typeName}`).join(',')}}`;
}
