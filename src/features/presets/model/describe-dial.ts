import type { DialSpec, DialValue } from '../../../../shared/contracts/dial';
import { formatQuantity } from '../../../lib/format-number';

/** A dial's value for reading; with its specification also the unit and the name of a choice. */
export function describeDialValue(value: DialValue, spec?: DialSpec): string {
  if (value === null) return spec?.type === 'region' ? 'not drawn' : 'chosen by the study';
  if (typeof value === 'number') {
    const unit = spec !== undefined && 'unit' in spec ? spec.unit : '1';
    return formatQuantity({ value, sigma: null, unit });
  }
  if (typeof value === 'string') {
    const options = spec?.type === 'choice' ? spec.options : [];
    return options.find((option) => option.value === value)?.label ?? value;
  }
  return `pixels ${value.x0} to ${value.x1} by ${value.y0} to ${value.y1}`;
}

export interface DescribedDial {
  id: string;
  label: string;
  value: string;
  reason: string;
  /** The preset gives it another value than the study's own. */
  changed: boolean;
}

/** Every dial of the study as the preset sets it, then settings the study does not know (they are not hidden). */
export function describeDials(dials: Record<string, DialValue>, specs: readonly DialSpec[]): DescribedDial[] {
  const known = specs.map((spec) => {
    const given = dials[spec.id];
    const value = given === undefined ? spec.default : given;
    return {
      id: spec.id,
      label: spec.label,
      value: describeDialValue(value, spec),
      reason: spec.reason,
      changed: JSON.stringify(value) !== JSON.stringify(spec.default),
    };
  });
  const ids = new Set(specs.map((spec) => spec.id));
  const unknown = Object.entries(dials)
    .filter(([id]) => !ids.has(id))
    .map(([id, value]) => ({ id, label: id, value: describeDialValue(value), reason: '', changed: false }));
  return [...known, ...unknown];
}
