import type { InputSetting, Preset } from '../../shared/contracts/preset';
import { presetSchema } from '../../shared/contracts/preset';
import type { ResultFile } from '../../shared/contracts/result';

/**
 * The preset that repeats the result: study, dials, and for each input the layout, detector map and plane it was read
 * with. Null for a study this page does not know.
 */
export function toPreset(file: ResultFile, name: string): Preset | null {
  const inputs: Record<string, InputSetting> = {};
  for (const { name: input, layout, detector, plane, second } of file.provenance.inputs) {
    inputs[input] ??= { layout, detector, plane };
    if (second === undefined) continue;
    const { channelOffset, offsetPs, drift } = second;
    inputs[input].companion = { layout, channelOffset, clock: { offsetPs, drift } };
  }
  const { dials, preset } = file.provenance;
  const parsed = presetSchema.safeParse({
    gemel: 1,
    kind: 'preset',
    name: preset?.name ?? name,
    study: file.study,
    dials,
    inputs,
  });
  return parsed.success ? parsed.data : null;
}
