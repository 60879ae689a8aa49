/** The part of jsfive 0.4 that is used; it ships no types. */
declare module 'jsfive' {
  type Message = Map<string, number>;

  interface DataObjects {
    msgs: Message[];
    _header: Map<string, number | string>;
    filter_pipeline: Map<string, unknown>[] | null;
    is_dataset: boolean;
  }

  export class Group {
    readonly name: string;
    readonly keys: string[];
    readonly attrs: Record<string, unknown>;
    /** Address of a hard link, or the target of a soft link. */
    readonly _links: Record<string, number | string>;
    readonly _dataobjects: DataObjects;
    get(path: string): Group | Dataset | null;
  }

  export class File extends Group {
    constructor(buffer: ArrayBufferLike, name?: string);
  }

  export class Dataset {
    readonly name: string;
    readonly shape: number[];
    readonly dtype: unknown;
    /** Every element, in C order; elements of chunks that were never written are holes. */
    readonly value: number[];
    readonly attrs: Record<string, unknown>;
    readonly _dataobjects: DataObjects;
  }
}
