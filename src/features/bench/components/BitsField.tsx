import { NumberField } from '../../../components/ui/NumberField';
import type { BitDraft } from '../model/layout-draft';

export interface BitsFieldProps {
  label: string;
  value: BitDraft;
  error: string | undefined;
  onChange(value: BitDraft): void;
}

/** A bit field of a record: where it begins and how many bits it has. */
export function BitsField({ label, value, error, onChange }: BitsFieldProps) {
  return (
    <fieldset className="grid grid-cols-[1fr_auto_auto] items-baseline gap-x-4">
      <legend className="sr-only">{label} bits</legend>
      <span aria-hidden="true" className="text-sm">
        {label} bits
      </span>
      <NumberField
        label="from"
        value={value.firstBit}
        integer
        min={0}
        max={127}
        placeholder="bit"
        onChange={(firstBit) => onChange({ ...value, firstBit })}
      />
      <NumberField
        label="count"
        value={value.bits}
        integer
        min={1}
        max={64}
        placeholder="bits"
        onChange={(bits) => onChange({ ...value, bits })}
      />
      {error === undefined ? null : (
        <p role="alert" className="col-span-3 mt-1 text-xs text-fail">
          {error}
        </p>
      )}
    </fieldset>
  );
}
