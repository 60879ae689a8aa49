import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import type { DraftErrors } from '../model/draft-errors';
import type { LayoutDraft } from '../model/layout-draft';
import { BitsField } from './BitsField';

export interface RecordFieldsProps {
  draft: LayoutDraft;
  errors: DraftErrors;
  onChange(part: Partial<LayoutDraft>): void;
}

const ORDERS = [
  { value: 'little', label: 'little-endian' },
  { value: 'big', label: 'big-endian' },
] as const;

const ROLLOVERS = [
  { value: 'none', label: 'never wraps' },
  { value: 'wrap', label: 'wraps by itself' },
  { value: 'marker', label: 'marked by records' },
] as const;

/** Fixed-width binary records: length, order of bytes, bits of time and channel, and how wraps are told. */
export function RecordFields({ draft, errors, onChange }: RecordFieldsProps) {
  return (
    <>
      <NumberField
        label="Record length"
        value={draft.recordBytes}
        unit="bytes"
        integer
        min={1}
        max={16}
        placeholder="missing"
        error={errors.recordBytes}
        onChange={(recordBytes) => onChange({ recordBytes })}
      />
      <Field layout="row" label="Byte order">
        {(control) => (
          <Select
            {...control}
            value={draft.byteOrder}
            options={ORDERS}
            onValueChange={(value) => onChange({ byteOrder: value === 'big' ? 'big' : 'little' })}
          />
        )}
      </Field>
      <NumberField
        label="Header to skip"
        value={draft.headerBytes}
        unit="bytes"
        integer
        min={0}
        max={1e9}
        error={errors.headerBytes}
        onChange={(headerBytes) => onChange({ headerBytes })}
      />
      <BitsField
        label="Time"
        value={draft.timeBits}
        error={errors.time}
        onChange={(timeBits) => onChange({ timeBits })}
      />
      <BitsField
        label="Channel"
        value={draft.channelBits}
        error={errors.channel}
        onChange={(channelBits) => onChange({ channelBits })}
      />
      <Field layout="row" label="Time counter" hint="Bit 0 is the least significant of the whole record.">
        {(control) => (
          <Select
            {...control}
            value={draft.rollover}
            options={ROLLOVERS}
            onValueChange={(value) => {
              const rollover = ROLLOVERS.find((option) => option.value === value)?.value;
              if (rollover !== undefined) onChange({ rollover });
            }}
          />
        )}
      </Field>
      {draft.rollover === 'marker' ? (
        <>
          <BitsField
            label="Marker"
            value={draft.markerBits}
            error={errors.marker}
            onChange={(markerBits) => onChange({ markerBits })}
          />
          <NumberField
            label="Marker equals"
            value={draft.markerEquals}
            integer
            min={0}
            placeholder="missing"
            error={errors['marker.equals']}
            onChange={(markerEquals) => onChange({ markerEquals })}
          />
          <NumberField
            label="Ticks one wrap adds"
            value={draft.advanceTick}
            integer
            min={1}
            placeholder="missing"
            error={errors['marker.advance']}
            onChange={(advanceTick) => onChange({ advanceTick })}
          />
          <Field layout="row" label="A marker stands for">
            {(control) => (
              <Select
                {...control}
                value={draft.wraps}
                options={[
                  { value: 'one', label: 'one wrap' },
                  { value: 'time-field', label: 'as many as its time field says' },
                ]}
                onValueChange={(value) => onChange({ wraps: value === 'time-field' ? 'time-field' : 'one' })}
              />
            )}
          </Field>
        </>
      ) : null}
    </>
  );
}
