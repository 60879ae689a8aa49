import { z } from '../util/zod';

/** How the bytes of a file become tags or frames. Version 1. */

const datasetPath = z.string().min(1).max(1000);

/** A column of integers: a 1-D dataset, a member of a compound dataset, or a column of an (n, 2..16) dataset. */
export const columnSchema = z.strictObject({
  dataset: datasetPath,
  /** Compound member name, or column index of a 2-D dataset. */
  field: z.union([z.string().min(1), z.int().min(0).max(15)]).optional(),
});
export type Column = z.infer<typeof columnSchema>;

/** Femtoseconds per tick. */
const tickFs = z.number().positive().max(1e15);

export const hdf5TagsLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('hdf5'),
  kind: z.literal('tags'),
  time: columnSchema,
  channel: columnSchema,
  tickFs,
});

export const hdf5FramesLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('hdf5'),
  kind: z.literal('frames'),
  dataset: datasetPath,
});

/** Bits of a record read as one integer of `recordBytes` bytes in the layout's byte order; bit 0 is the least significant. */
export const bitFieldSchema = z.strictObject({
  firstBit: z.int().min(0).max(127),
  bits: z.int().min(1).max(64),
});
export type BitField = z.infer<typeof bitFieldSchema>;

const bitConditionSchema = z.strictObject({ field: bitFieldSchema, equals: z.int().min(0) });

export const rolloverSchema = z.discriminatedUnion('in', [
  /** The time field never wraps. */
  z.strictObject({ in: z.literal('none') }),
  /** The time field wraps; a fall by more than half its range is one wrap. */
  z.strictObject({ in: z.literal('wrap') }),
  /** Special records announce wraps and yield no tag. */
  z.strictObject({
    in: z.literal('marker'),
    /** All must hold for a record to be a rollover marker. */
    when: z.array(bitConditionSchema).min(1).max(4),
    /** Ticks added per wrap. */
    advanceTick: z.number().positive(),
    /** `one`: each marker is one wrap; `time-field`: the marker's time field holds how many. */
    wraps: z.enum(['one', 'time-field']),
  }),
]);
export type Rollover = z.infer<typeof rolloverSchema>;

export const recordsLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('records'),
  kind: z.literal('tags'),
  recordBytes: z.int().min(1).max(16),
  byteOrder: z.enum(['little', 'big']),
  headerBytes: z.int().min(0).max(1e9),
  time: bitFieldSchema,
  channel: bitFieldSchema,
  rollover: rolloverSchema,
  /** Records to drop silently (status words); tested after the rollover marker. */
  skip: z.array(z.array(bitConditionSchema).min(1).max(4)).max(4).default([]),
  tickFs,
});

/** A column of integers in NumPy files: a 1-D array, a field of a structured one, or a column of an (n, 2..16) array. */
export const arrayColumnSchema = z.strictObject({
  /** Name of the array in an NPZ archive (without ".npy"); left out for an NPY file. */
  array: z.string().min(1).max(1000).optional(),
  /** Field name, or column index of a 2-D array. */
  field: z.union([z.string().min(1), z.int().min(0).max(15)]).optional(),
});
export type ArrayColumn = z.infer<typeof arrayColumnSchema>;

export const npyTagsLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('npy'),
  kind: z.literal('tags'),
  time: arrayColumnSchema,
  channel: arrayColumnSchema,
  tickFs,
});

export const npyFramesLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('npy'),
  kind: z.literal('frames'),
  /** As in `arrayColumnSchema`. */
  array: z.string().min(1).max(1000).optional(),
});

/** Every page is a frame; all must have one size and one sample type. */
export const tiffLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('tiff'),
  kind: z.literal('frames'),
});

/** One tag a line. */
export const textLayoutSchema = z.strictObject({
  version: z.literal(1),
  format: z.literal('text'),
  kind: z.literal('tags'),
  /** `space`: any run of blanks. */
  delimiter: z.enum(['comma', 'semicolon', 'tab', 'space']),
  decimal: z.enum(['point', 'comma']),
  /** Lines before the first tag; lines beginning with # are passed over anywhere. */
  headerLines: z.int().min(0).max(1000),
  timeColumn: z.int().min(0).max(255),
  channelColumn: z.int().min(0).max(255),
  /** Femtoseconds that 1 in the time column stands for: 1e15 for seconds, the tick length for whole ticks. */
  timeUnitFs: z.number().positive().max(1e18),
  /** Times are rounded to whole ticks of this length. */
  tickFs,
});

export const layoutSchema = z.union([
  hdf5TagsLayoutSchema,
  hdf5FramesLayoutSchema,
  recordsLayoutSchema,
  npyTagsLayoutSchema,
  npyFramesLayoutSchema,
  tiffLayoutSchema,
  textLayoutSchema,
]);

export type Hdf5TagsLayout = z.infer<typeof hdf5TagsLayoutSchema>;
export type Hdf5FramesLayout = z.infer<typeof hdf5FramesLayoutSchema>;
export type RecordsLayout = z.infer<typeof recordsLayoutSchema>;
export type NpyTagsLayout = z.infer<typeof npyTagsLayoutSchema>;
export type NpyFramesLayout = z.infer<typeof npyFramesLayoutSchema>;
export type TiffLayout = z.infer<typeof tiffLayoutSchema>;
export type TextLayout = z.infer<typeof textLayoutSchema>;
export type Layout = z.infer<typeof layoutSchema>;
export type FormatId = Layout['format'];
