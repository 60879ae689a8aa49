import { z } from '../util/zod';
import { detectorSchema } from './detector';
import { dialValueSchema } from './dial';
import { layoutSchema } from './layout';
import { planeSchema } from './plane';

/** The result file: written by the command line, stored by the server, read by tests. Version 1. */

/** Far above what any study gives; they keep one file from filling the store with names. */
const mostEntries = 2000;
const longestKey = 200;
const named = <T extends z.ZodType>(entry: T) =>
  z
    .record(z.string(), entry)
    .refine((record) => Object.keys(record).length <= mostEntries, `more than ${mostEntries} entries`)
    .refine(
      (record) => Object.keys(record).every((key) => key.length <= longestKey),
      `a name is longer than ${longestKey} characters`,
    );

export const quantitySchema = z.strictObject({
  value: z.number(),
  sigma: z.number().min(0).nullable(),
  unit: z.string().max(40),
  method: z.string().max(300),
  n: z.number().min(0),
});

export const verdictSchema = z.strictObject({
  bound: z.number(),
  side: z.enum(['below', 'above']),
  significance: z.number(),
  significanceLinear: z.number(),
  interval: z.tuple([z.number(), z.number()]),
  level: z.enum(['violated', 'indicated', 'inconclusive', 'not-violated']),
  sentence: z.string().max(1000),
});

export const checkSchema = z.strictObject({
  id: z.string().max(80),
  status: z.enum(['pass', 'caution', 'fail']),
  figure: z.number().nullable(),
  unit: z.string().max(40),
  sentence: z.string().max(1000),
});

export const axisSchema = z.strictObject({
  label: z.string().max(80),
  unit: z.string().max(40),
  start: z.number(),
  step: z.number(),
  arm: z.enum(['signal', 'idler', 'pair']).optional(),
});

/** Base64 of little-endian float64 (data, sigma, model) or uint8 (masked). */
const base64 = z.string().regex(/^[A-Za-z0-9+/]*={0,2}$/);

export const mapFileSchema = z.strictObject({
  label: z.string().max(200),
  /** At most 2^22 numbers: a delay histogram may have many bins, a map many pixels. */
  shape: z
    .array(
      z
        .int()
        .min(1)
        .max(2 ** 22),
    )
    .min(1)
    .max(2)
    .refine((shape) => shape.reduce((product, length) => product * length, 1) <= 2 ** 22, 'too many numbers'),
  axes: z.array(axisSchema).min(1).max(2),
  unit: z.string().max(40),
  scale: z.enum(['counts', 'signed']),
  /** Exactly one of `data` (inline) and `file` (NPY beside the result). */
  data: base64.optional(),
  file: z.string().max(300).optional(),
  masked: base64.optional(),
  sigma: base64.optional(),
  model: base64.optional(),
  ellipse: z
    .strictObject({ x: z.number(), y: z.number(), xx: z.number(), xy: z.number(), yy: z.number() })
    .optional(),
});
export type MapFile = z.infer<typeof mapFileSchema>;

export const resultFileSchema = z.strictObject({
  gemel: z.literal(1),
  study: z.string().max(80),
  quantities: named(quantitySchema),
  verdicts: named(verdictSchema),
  checks: z.array(checkSchema).max(200),
  maps: named(mapFileSchema),
  chosen: named(z.number()),
  statement: z.string().max(10_000),
  provenance: z.strictObject({
    inputs: z
      .array(
        z.strictObject({
          name: z.string().max(80),
          fileName: z.string().max(400),
          sha256: z.string().regex(/^[0-9a-f]{64}$/),
          bytes: z.int().min(0),
          layout: layoutSchema,
          detector: detectorSchema,
          plane: planeSchema.nullable(),
          second: z
            .strictObject({ channelOffset: z.int(), offsetPs: z.number(), drift: z.number() })
            .optional(),
        }),
      )
      .max(10_000),
    preset: z.strictObject({ name: z.string().max(200), version: z.int().nullable() }).nullable(),
    dials: named(dialValueSchema),
    engine: z.string().max(40),
    seed: z.int(),
    startedAt: z.string().max(40),
    seconds: z.number().min(0),
  }),
});
export type ResultFile = z.infer<typeof resultFileSchema>;
