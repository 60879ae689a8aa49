import { z } from '../util/zod';

/** Detector map: channel or pixel -> arm, array, x, y; pitch, mask, per-channel delay. Version 1. */

export const arrayMapSchema = z.strictObject({
  width: z.int().min(1).max(1024),
  height: z.int().min(1).max(1024),
  /** Channel of the first pixel; the others follow without a gap. */
  firstChannel: z.int().min(0).max(65535),
  /** `rows`: x runs fastest; `columns`: y runs fastest. */
  order: z.enum(['rows', 'columns']).default('rows'),
  flipX: z.boolean().default(false),
  flipY: z.boolean().default(false),
  pitchUm: z.number().positive().max(1e5),
  /** Pixels to leave out, as y * width + x after the flips. */
  maskedPixels: z.array(z.int().min(0)).max(65536).default([]),
  /** Added to every tag of the array. */
  delayPs: z.number().default(0),
  /** Added per pixel, on top of `delayPs`; empty, or one value a pixel in y * width + x order. */
  pixelDelayPs: z.array(z.number()).max(65536).default([]),
});
export type ArrayMap = z.infer<typeof arrayMapSchema>;

export const tagDetectorSchema = z.strictObject({
  version: z.literal(1),
  kind: z.literal('tags'),
  signal: arrayMapSchema.optional(),
  idler: arrayMapSchema.optional(),
  bucket: z.strictObject({ channel: z.int().min(0).max(65535), delayPs: z.number().default(0) }).optional(),
});
export type TagDetector = z.infer<typeof tagDetectorSchema>;

export const frameDetectorSchema = z.strictObject({
  version: z.literal(1),
  kind: z.literal('frames'),
  pitchUm: z.number().positive().max(1e5),
  /** Pixels to leave out, as y * width + x. */
  maskedPixels: z.array(z.int().min(0)).max(1048576).default([]),
});

export const detectorSchema = z.discriminatedUnion('kind', [tagDetectorSchema, frameDetectorSchema]);
export type Detector = z.infer<typeof detectorSchema>;
export type Arm = 'signal' | 'idler' | 'bucket';
