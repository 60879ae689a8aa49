import type { ByteSource } from '../../../shared/contracts/reader';

/** Reads small pieces of a file through the last larger one, because each reading of a file has its own cost. */
export interface FileWindow {
  /** Bytes [start, end), fewer at the end of the file. Small pieces only. `ahead`: how much to read at once. */
  read(start: number, end: number, ahead: number): Promise<Uint8Array>;
}

export function createWindow(source: ByteSource): FileWindow {
  let from = 0;
  let held: Uint8Array = new Uint8Array(0);
  return {
    read: async (start, end, ahead) => {
      if (start < from || end > from + held.length) {
        held = await source.read(start, Math.max(end, start + ahead));
        from = start;
      }
      return held.subarray(start - from, end - from);
    },
  };
}
