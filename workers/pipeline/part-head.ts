import { detectorSchema } from '../../shared/contracts/detector';
import { dialValueSchema } from '../../shared/contracts/dial';
import { layoutSchema } from '../../shared/contracts/layout';
import { planeSchema } from '../../shared/contracts/plane';
import { studyIds } from '../../shared/contracts/study';
import { z } from '../../shared/util/zod';

/** What a part file says of itself: all that `combine` needs beside the counts, and all that it compares. */
const hex = z.string().regex(/^[0-9a-f]{64}$/);
const count = z.int().min(0);
const side = z.int().min(1).max(65536);

const estimate = z.strictObject({ value: z.number(), sigma: z.number() });
const clockSchema = z.strictObject({
  offset: estimate,
  drift: estimate,
  line: z
    .strictObject({
      stretches: count,
      found: count,
      residualPs: z.number(),
      chi2PerDof: z.number(),
      peakSigmaPs: z.number(),
    })
    .nullable(),
});

const factsSchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('tags'),
    records: count,
    tickFs: z.number().positive(),
    reader: z.string().max(80),
  }),
  z.strictObject({
    kind: z.literal('frames'),
    frames: count,
    width: side,
    height: side,
    type: z.string().max(80),
    reader: z.string().max(80),
  }),
]);

/** One file of an input, in the order in which they are read. */
const partFactsOfFileSchema = z.strictObject({
  name: z.string().max(400),
  bytes: count,
  layout: layoutSchema,
  /** SHA-256 of the first and the last MiB: every shard has it. */
  ends: hex,
  /** Of the whole file: shard 1 alone reads it for that. */
  sha256: hex.nullable(),
});
export type PartFileFacts = z.infer<typeof partFactsOfFileSchema>;

const partInputSchema = z.strictObject({
  name: z.string().max(80),
  files: z.array(partFactsOfFileSchema).min(1).max(10_000),
  layout: layoutSchema,
  detector: detectorSchema,
  plane: planeSchema.nullable(),
  facts: factsSchema,
  clock: clockSchema.optional(),
  chosen: z.record(z.string(), z.number()),
  /** SHA-256 of the specification counted with. */
  spec: hex,
  /** Chunks [first, stop) of `chunks`. */
  range: z.strictObject({ first: count, stop: count, chunks: count }),
});
export type PartInput = z.infer<typeof partInputSchema>;

export const partHeadSchema = z.strictObject({
  gemel: z.literal(1),
  kind: z.literal('part'),
  engine: z.string().max(40),
  preset: z.string().max(200),
  study: z.enum(studyIds),
  dials: z.record(z.string(), dialValueSchema),
  seed: z.int(),
  shard: z.strictObject({ index: z.int().min(1), of: z.int().min(1) }),
  startedAt: z.string().max(40),
  seconds: z.number().min(0),
  inputs: z.array(partInputSchema).min(1).max(20),
});
export type PartHead = z.infer<typeof partHeadSchema>;
