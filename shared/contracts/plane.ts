import { z } from '../util/zod';

/** Near or far field, with its calibration. Every calibration number carries its own 1-sigma uncertainty. Version 1. */

export const calibratedSchema = z.strictObject({ value: z.number(), sigma: z.number().min(0) });
export type Calibrated = z.infer<typeof calibratedSchema>;
const positive = calibratedSchema.refine((c) => c.value > 0, 'must be above zero');

export const nearPlaneSchema = z.strictObject({
  version: z.literal(1),
  kind: z.literal('near'),
  /** Image size on the detector over object size in the crystal. */
  magnification: positive,
});
export const farPlaneSchema = z.strictObject({
  version: z.literal(1),
  kind: z.literal('far'),
  /** Effective focal length of the whole train, mm. */
  focalLengthMm: positive,
  /** Vacuum wavelengths, nm. */
  signalNm: positive,
  idlerNm: positive,
});
export const planeSchema = z.discriminatedUnion('kind', [nearPlaneSchema, farPlaneSchema]);
export type Plane = z.infer<typeof planeSchema>;
export type PlaneKind = Plane['kind'];
