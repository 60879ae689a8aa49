import { z } from '../util/zod';
import { detectorSchema } from './detector';
import { dialValueSchema } from './dial';
import { layoutSchema } from './layout';
import { planeSchema } from './plane';
import { presetSchema } from './preset';
import { resultFileSchema } from './result';

/** Bodies of the JSON API under /api. Everything is inside one group: /api/groups/:groupId/... */

export const roles = ['lead', 'analyst', 'runner', 'guest'] as const;
export type Role = (typeof roles)[number];

export const errorBodySchema = z.object({
  error: z.object({ code: z.string(), message: z.string(), place: z.string().nullable().default(null) }),
});
export type ErrorBody = z.infer<typeof errorBodySchema>;

/** GET /api/me */
export const meSchema = z.object({
  user: z.object({ id: z.string(), name: z.string(), email: z.string() }),
  groups: z.array(z.object({ id: z.string(), name: z.string(), role: z.enum(roles) })),
});
export type Me = z.infer<typeof meSchema>;

/** GET /api/server (open): what the sign-in page needs to know. */
export const serverInfoSchema = z.object({
  version: z.string(),
  /** Present only on loopback with the demo group. */
  demo: z.object({ email: z.string(), password: z.string() }).nullable(),
});
export type ServerInfo = z.infer<typeof serverInfoSchema>;

/** GET /api/samples, GET /api/samples/:file (signed in). */
export const sampleSchema = z.object({
  file: z.string(),
  bytes: z.number(),
  sha256: z.string(),
  /** What it shows, one sentence. */
  shows: z.string(),
});
export const samplesSchema = z.object({
  scenario: z.string(),
  files: z.array(sampleSchema),
  /** Presets with the files their inputs take, so that one click opens and runs them. */
  presets: z.array(z.object({ preset: presetSchema, files: z.record(z.string(), z.string()) })),
});
export type Samples = z.infer<typeof samplesSchema>;

const stamp = {
  id: z.string(),
  createdAt: z.string(),
  updatedAt: z.string(),
  /** Name of the maker, for reading. */
  by: z.string(),
  /** Id of the maker, as in GET /api/me, to tell one's own. */
  byId: z.string().optional(),
};

export const presetRowSchema = z.object({
  ...stamp,
  name: z.string(),
  study: z.string(),
  version: z.int(),
  preset: presetSchema,
});
export const presetListSchema = z.object({ presets: z.array(presetRowSchema) });
/** POST /presets, and POST /presets/:id for a new version. */
export const presetWriteSchema = z.strictObject({ preset: presetSchema });
export type PresetRow = z.infer<typeof presetRowSchema>;

const sessionFile = {
  name: z.string().max(400),
  bytes: z.int().min(0),
  sha256: z.string().max(64).nullable(),
};

/** A session: state of the bench. Files are named by fingerprint; their bytes never leave the machine. */
export const benchStateSchema = z.strictObject({
  version: z.literal(1),
  study: z.string().max(80),
  preset: presetSchema,
  /** Acquisitions in their order, and which input of the study each serves. */
  shelf: z
    .array(
      z.strictObject({
        ...sessionFile,
        input: z.string().max(80).nullable(),
        /** Sample file name when it came with Gemel, so that it reopens by itself. */
        sample: z.string().max(200).nullable(),
        /** How it is read: layout null where nobody confirmed one. Absent in sessions of before this was kept. */
        layout: layoutSchema.nullable().optional(),
        detector: detectorSchema.nullable().optional(),
        /** false: the map is a proposal, or its pitch is not known. */
        detectorGiven: z.boolean().optional(),
        plane: planeSchema.nullable().optional(),
        /** Files that go on where this one ends, in their order. */
        following: z.array(z.strictObject(sessionFile)).max(1000).optional(),
        /** A second file on a clock of its own; clock null: to be found. */
        companion: z
          .strictObject({
            ...sessionFile,
            layout: layoutSchema,
            channelOffset: z.int().min(0).max(65535),
            clock: z.strictObject({ offsetPs: z.number(), drift: z.number() }).nullable(),
          })
          .optional(),
      }),
    )
    .max(50),
  /** By study: dials that were set. */
  dials: z.record(z.string().max(80), z.record(z.string().max(80), dialValueSchema)).optional(),
  /** By study and input: place on the shelf from 0, null where a person left the input empty. */
  assigned: z
    .record(z.string().max(80), z.record(z.string().max(80), z.int().min(0).max(49).nullable()))
    .optional(),
  seed: z.int(),
  resultId: z.string().nullable(),
});
export type BenchState = z.infer<typeof benchStateSchema>;
export const sessionWriteSchema = z.strictObject({
  name: z.string().min(1).max(200),
  state: benchStateSchema,
});
export const sessionRowSchema = z.object({ ...stamp, name: z.string(), state: benchStateSchema });
export const sessionListSchema = z.object({
  sessions: z.array(z.object({ ...stamp, name: z.string(), study: z.string() })),
});
export type SessionRow = z.infer<typeof sessionRowSchema>;

/** POST /results: maps inline. */
export const resultWriteSchema = z.strictObject({
  name: z.string().min(1).max(200),
  result: resultFileSchema,
});
export const resultSummarySchema = z.object({
  ...stamp,
  name: z.string(),
  study: z.string(),
  /** Headline: up to three quantities. */
  headline: z.array(
    z.object({ id: z.string(), value: z.number(), sigma: z.number().nullable(), unit: z.string() }),
  ),
});
export type ResultSummary = z.infer<typeof resultSummarySchema>;
export const resultListSchema = z.object({ results: z.array(resultSummarySchema) });
/** GET /results/:id: maps as { file: "/api/groups/G/maps/<sha256>" } addresses of the packed arrays. */
export const resultRowSchema = z.object({
  ...stamp,
  name: z.string(),
  study: z.string(),
  result: resultFileSchema,
});
export type ResultRow = z.infer<typeof resultRowSchema>;
