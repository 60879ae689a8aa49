import type { DialSpec, DialValue } from '../../../../shared/contracts/dial';
import type { Preset } from '../../../../shared/contracts/preset';
import { describeDialValue } from './describe-dial';

export interface Difference {
  what: string;
  before: string;
  after: string;
}

function same(a: unknown, b: unknown): boolean {
  return JSON.stringify(a) === JSON.stringify(b);
}

const SETTINGS = ['layout', 'detector', 'plane'] as const;
const SETTING_WORDS = { layout: 'layout', detector: 'detector map', plane: 'plane' } as const;

/** What a version changed, in words; an input's settings are named, not spelled out. */
export function listDifferences(before: Preset, after: Preset, specs: readonly DialSpec[]): Difference[] {
  const specOf = new Map(specs.map((spec) => [spec.id, spec]));
  const say = (id: string, value: DialValue | undefined): string => {
    const spec = specOf.get(id);
    const shown = value === undefined ? spec?.default : value;
    return shown === undefined ? 'not set' : describeDialValue(shown, spec);
  };
  const differences: Difference[] = [];
  if (before.name !== after.name) differences.push({ what: 'Name', before: before.name, after: after.name });
  const dialIds = new Set([...Object.keys(before.dials), ...Object.keys(after.dials)]);
  for (const id of dialIds) {
    const [was, is] = [say(id, before.dials[id]), say(id, after.dials[id])];
    // A default said or left unsaid is the same dial.
    if (was !== is) differences.push({ what: specOf.get(id)?.label ?? id, before: was, after: is });
  }
  const names = new Set([...Object.keys(before.inputs), ...Object.keys(after.inputs)]);
  for (const name of names) {
    const [was, is] = [before.inputs[name], after.inputs[name]];
    for (const setting of SETTINGS) {
      const [a, b] = [was?.[setting] ?? null, is?.[setting] ?? null];
      if (!same(a, b)) {
        const none = setting === 'plane' ? 'none' : 'proposed from the bytes';
        const word = (value: unknown): string => (value === null ? none : 'given');
        differences.push({
          what: `${name}: ${SETTING_WORDS[setting]}`,
          before: word(a),
          after: a !== null && b !== null ? 'given anew' : word(b),
        });
      }
    }
  }
  return differences;
}
