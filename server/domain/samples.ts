import type { Samples } from '../../shared/contracts/http';
import { presetSchema } from '../../shared/contracts/preset';
import { z } from '../../shared/util/zod';
import type { SampleStore } from '../data/sample-store';
import { notFound, Refusal } from '../platform/refusal';

const manifestSchema = z.object({
  gemel: z.literal(1),
  scenario: z.string(),
  files: z.array(z.object({ file: z.string(), bytes: z.number(), sha256: z.string(), shows: z.string() })),
  presets: z.array(z.object({ preset: z.string(), files: z.record(z.string(), z.string()) })),
});

/** The samples with their presets read in; empty when the folder has no manifest. */
export async function readSamples(store: SampleStore): Promise<Samples> {
  const found = await store.readJson('manifest.json');
  if (found === null) return { scenario: '', files: [], presets: [] };
  const manifest = parseTracked(manifestSchema, found, 'manifest.json');
  const presets: Samples['presets'] = [];
  for (const entry of manifest.presets) {
    const preset = parseTracked(presetSchema, await store.readJson(entry.preset), entry.preset);
    presets.push({ preset, files: entry.files });
  }
  return { scenario: manifest.scenario, files: manifest.files, presets };
}

/** The manifest's entry of a file; other files of the folder are not served. */
export async function findSample(store: SampleStore, file: string): Promise<Samples['files'][number]> {
  const entry = (await readSamples(store)).files.find((sample) => sample.file === file);
  if (entry === undefined) throw notFound('sample');
  return entry;
}

function parseTracked<T>(schema: z.ZodType<T>, value: unknown, name: string): T {
  const parsed = schema.safeParse(value);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0];
  throw new Refusal(
    'internal',
    `The sample file ${name} is missing or wrong (${issue?.path.join('.') ?? ''}: ${issue?.message ?? ''}): make the samples again.`,
    name,
  );
}
