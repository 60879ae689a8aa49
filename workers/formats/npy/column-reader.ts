import type { CancelToken } from '../../../shared/contracts/reader';
import { gatherBytes, swapBytes } from '../gather';
import type { NumberType } from '../numbers';
import type { ArrayBytes } from './array-bytes';
import type { ColumnPlace } from './columns';

/** Rows [start, end) of one column after another, packed and little-endian. */
export interface ColumnReader {
  read(start: number, end: number, token: CancelToken): Promise<Uint8Array[]>;
}

/**
 * Reads columns side by side. Columns of the same rows are cut from one reading of these; each other column has a
 * stream of its own, so that an unpacking one never goes back.
 */
export async function openColumns(columns: readonly ColumnPlace[]): Promise<ColumnReader> {
  const groups: { bytes: ArrayBytes; columns: ColumnPlace[] }[] = [];
  for (const column of columns) {
    const shared = groups.find((group) => isInterleaved(group.columns[0]!, column));
    if (shared) shared.columns.push(column);
    else groups.push({ bytes: await column.array.openBytes(), columns: [column] });
  }
  return {
    read: async (start, end, token) => {
      const packed = new Map<ColumnPlace, Uint8Array>();
      for (const { bytes, columns: members } of groups) {
        const { stride } = members[0]!;
        const first = Math.min(...members.map((column) => column.start));
        const last = Math.max(...members.map((column) => column.start + column.number.bytes));
        const from = first + start * stride;
        const rows =
          end === start ? new Uint8Array(0) : await bytes.read(from, last + (end - 1) * stride, token);
        for (const column of members) {
          packed.set(column, gather(rows, column.start - first, stride, end - start, column));
        }
      }
      return columns.map((column) => packed.get(column)!);
    },
  };
}

function isInterleaved(one: ColumnPlace, other: ColumnPlace): boolean {
  return (
    one.array === other.array && one.stride === other.stride && Math.abs(one.start - other.start) < one.stride
  );
}

function gather(
  rows: Uint8Array,
  offset: number,
  stride: number,
  count: number,
  { number, isBig }: { number: NumberType; isBig: boolean },
): Uint8Array {
  const { bytes } = number;
  const packed = stride === bytes ? rows : gatherBytes(rows, offset, stride, count, bytes);
  return isBig ? swapBytes(packed, bytes) : packed;
}
