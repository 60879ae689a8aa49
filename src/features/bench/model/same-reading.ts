import type { InputSetting } from '../../../../shared/contracts/preset';
import type { InputSpec } from '../../../../shared/contracts/study';

/** JSON with sorted keys: settings from a form and settings from the server name their parts in different order. */
function canonical(value: unknown): string {
  return JSON.stringify(value, (_key, part: unknown) =>
    part !== null && typeof part === 'object' && !Array.isArray(part)
      ? Object.fromEntries(Object.entries(part).sort(([a], [b]) => (a < b ? -1 : 1)))
      : part,
  );
}

/** Is an input read as the preset says? What the preset leaves open (null) may be anything. */
export function isReadAs(
  spec: InputSpec,
  given: InputSetting,
  read: Pick<InputSetting, 'layout' | 'detector' | 'plane'>,
): boolean {
  const parts = (['layout', 'detector', 'plane'] as const).filter(
    // A study without calibration is never handed the plane.
    (part) => given[part] !== null && !(part === 'plane' && spec.plane === 'none'),
  );
  return parts.every((part) => canonical(given[part]) === canonical(read[part]));
}
