import { z } from '../util/zod';
import { detectorSchema } from './detector';
import { dialValueSchema } from './dial';
import { layoutSchema } from './layout';
import { planeSchema } from './plane';
import { studyIds } from './study';

/** How a second file with a clock of its own is read. */
export const companionSettingSchema = z.strictObject({
  layout: layoutSchema.nullable().default(null),
  /** Added to its channels. */
  channelOffset: z.int().min(0).max(65535).default(0),
  /** t_main = t_companion (1 + drift) + offset; null: found from the coincidences. */
  clock: z
    .strictObject({ offsetPs: z.number(), drift: z.number().gt(-0.5).lt(0.5) })
    .nullable()
    .default(null),
});

/** How one input of a study is read: layout, detector map, plane. `null` layout: propose one from the bytes. */
export const inputSettingSchema = z.strictObject({
  layout: layoutSchema.nullable().default(null),
  detector: detectorSchema.nullable().default(null),
  plane: planeSchema.nullable().default(null),
  companion: companionSettingSchema.optional(),
});
export type InputSetting = z.infer<typeof inputSettingSchema>;

export const presetSchema = z.strictObject({
  gemel: z.literal(1),
  kind: z.literal('preset'),
  name: z.string().min(1).max(200),
  study: z.enum(studyIds),
  dials: z.record(z.string(), dialValueSchema).default({}),
  inputs: z.record(z.string(), inputSettingSchema).default({}),
});
export type Preset = z.infer<typeof presetSchema>;
