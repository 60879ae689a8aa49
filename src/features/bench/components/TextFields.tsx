import { TIME_UNITS } from '../../../components/output/input-words';
import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import type { DraftErrors } from '../model/draft-errors';
import type { LayoutDraft } from '../model/layout-draft';

export interface TextFieldsProps {
  draft: LayoutDraft;
  errors: DraftErrors;
  onChange(part: Partial<LayoutDraft>): void;
}

const DELIMITERS = [
  { value: 'comma', label: 'comma' },
  { value: 'semicolon', label: 'semicolon' },
  { value: 'tab', label: 'tab' },
  { value: 'space', label: 'blanks' },
] as const;

const DECIMALS = [
  { value: 'point', label: 'point, 1.5' },
  { value: 'comma', label: 'comma, 1,5' },
] as const;

const UNITS = [
  ...TIME_UNITS.map(({ unit }) => ({ value: unit, label: unit })),
  { value: 'tick' as const, label: 'whole ticks' },
  { value: 'other' as const, label: 'another unit' },
];

/** Text with one tag a line: how its columns are parted and what its times count. */
export function TextFields({ draft, errors, onChange }: TextFieldsProps) {
  return (
    <>
      <Field layout="row" label="Between columns">
        {(control) => (
          <Select
            {...control}
            value={draft.delimiter}
            options={DELIMITERS}
            onValueChange={(value) => {
              const delimiter = DELIMITERS.find((option) => option.value === value)?.value;
              if (delimiter !== undefined) onChange({ delimiter });
            }}
          />
        )}
      </Field>
      <Field layout="row" label="Decimal mark" error={errors.decimal}>
        {(control) => (
          <Select
            {...control}
            value={draft.decimal}
            options={DECIMALS}
            onValueChange={(value) => onChange({ decimal: value === 'comma' ? 'comma' : 'point' })}
          />
        )}
      </Field>
      <NumberField
        label="Header to skip"
        value={draft.headerLines}
        unit="lines"
        integer
        min={0}
        max={1000}
        error={errors.headerLines}
        hint="Lines that begin with # are passed over anywhere."
        onChange={(headerLines) => onChange({ headerLines })}
      />
      <NumberField
        label="Time column"
        value={draft.timeColumn === null ? null : draft.timeColumn + 1}
        integer
        min={1}
        max={256}
        placeholder="missing"
        error={errors.timeColumn}
        onChange={(column) => onChange({ timeColumn: column - 1 })}
      />
      <NumberField
        label="Channel column"
        value={draft.channelColumn === null ? null : draft.channelColumn + 1}
        integer
        min={1}
        max={256}
        placeholder="missing"
        error={errors.channelColumn}
        hint="The first column is 1."
        onChange={(column) => onChange({ channelColumn: column - 1 })}
      />
      <Field layout="row" label="Times in" error={draft.timeUnit === 'other' ? undefined : errors.timeUnit}>
        {(control) => (
          <Select
            {...control}
            value={draft.timeUnit}
            options={UNITS}
            onValueChange={(value) => {
              const timeUnit = UNITS.find((option) => option.value === value)?.value;
              if (timeUnit !== undefined) onChange({ timeUnit });
            }}
          />
        )}
      </Field>
      {draft.timeUnit === 'other' ? (
        <NumberField
          label="One unit of time is"
          value={draft.otherUnitPs}
          unit="ps"
          min={0}
          placeholder="missing"
          error={errors.timeUnit}
          onChange={(otherUnitPs) => onChange({ otherUnitPs })}
        />
      ) : null}
    </>
  );
}
