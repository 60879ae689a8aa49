import { createHash } from 'node:crypto';
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { presetSchema } from '../../../../shared/contracts/preset';
import { z } from '../../../../shared/util/zod';
import { parseScenario } from '../../../../workers/simulate/scenario';

const folder = fileURLToPath(new URL('../../../../samples', import.meta.url));
const readJson = (name: string): unknown => JSON.parse(readFileSync(join(folder, name), 'utf8'));

const manifest = z
  .strictObject({
    gemel: z.literal(1),
    scenario: z.string().min(50),
    files: z.array(
      z.strictObject({
        file: z.string(),
        bytes: z.int(),
        sha256: z.string().length(64),
        shows: z.string(),
        seed: z.int(),
      }),
    ),
    presets: z.array(z.strictObject({ preset: z.string(), files: z.record(z.string(), z.string()) })),
  })
  .parse(readJson('manifest.json'));

describe('the samples', () => {
  it.each(manifest.files)('hold $file as the manifest says', ({ file, bytes, sha256 }) => {
    const found = readFileSync(join(folder, file));
    expect(found.length).toBe(bytes);
    expect(createHash('sha256').update(found).digest('hex')).toBe(sha256);
  });

  it('list every file, and stay below 12 MB together', () => {
    const present = readdirSync(folder).filter((name) => /\.(h5|bin)$/.test(name));
    expect(manifest.files.map(({ file }) => file).sort()).toEqual(present.sort());
    expect(manifest.files.reduce((sum, { bytes }) => sum + bytes, 0)).toBeLessThanOrEqual(12e6);
  });

  it('come with presets whose inputs are among them', () => {
    const used = new Set<string>();
    const kept = readdirSync(join(folder, 'presets')).map((name) => `presets/${name}`);
    expect(manifest.presets.map(({ preset }) => preset).sort()).toEqual(kept.sort());
    for (const { preset, files } of manifest.presets) {
      const parsed = presetSchema.parse(readJson(preset));
      expect(Object.keys(parsed.inputs).sort()).toEqual(Object.keys(files).sort());
      for (const file of Object.values(files)) used.add(file);
    }
    expect([...used].sort()).toEqual(manifest.files.map(({ file }) => file).sort());
  });

  it('come with the scenarios they were made from', () => {
    const seeds = readdirSync(join(folder, 'scenarios')).map(
      (name) => parseScenario(readJson(`scenarios/${name}`)).seed,
    );
    expect(new Set(seeds)).toEqual(new Set(manifest.files.map(({ seed }) => seed)));
  });
});
