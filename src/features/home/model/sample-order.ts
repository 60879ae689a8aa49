import type { Samples } from '../../../../shared/contracts/http';

export type SamplePreset = Samples['presets'][number];

export interface SampleEntry {
  /** Place in the manifest: the address of the sample on the bench. */
  index: number;
  preset: SamplePreset['preset'];
  /** Sentences of its files, each once. */
  shows: string[];
  bytes: number;
}

function takesTags({ preset }: SamplePreset): boolean {
  const inputs = Object.values(preset.inputs);
  return inputs.every(({ layout, detector }) => layout?.kind !== 'frames' && detector?.kind !== 'frames');
}

/** Which sample to open first: the witness from time tags shows the most of the bench. */
function rank(entry: SamplePreset): number {
  if (entry.preset.study !== 'witness') return 2;
  return takesTags(entry) ? 0 : 1;
}

/** Samples as they are offered: the first is the one behind the large button. */
export function orderSamples(samples: Samples): SampleEntry[] {
  const facts = new Map(samples.files.map((file) => [file.file, file]));
  return samples.presets
    .map((entry, index) => ({ entry, index }))
    .sort((a, b) => rank(a.entry) - rank(b.entry) || a.index - b.index)
    .map(({ entry, index }) => {
      const files = [...new Set(Object.values(entry.files))].flatMap((name) => facts.get(name) ?? []);
      return {
        index,
        preset: entry.preset,
        shows: [...new Set(files.map((file) => file.shows))],
        bytes: files.reduce((sum, file) => sum + file.bytes, 0),
      };
    });
}
