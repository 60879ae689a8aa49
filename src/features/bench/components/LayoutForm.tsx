import type { DatasetFact } from '../../../../shared/contracts/engine';
import type { Column } from '../../../../shared/contracts/layout';
import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import { columnOptions, frameOptions } from '../model/column-options';
import type { DraftErrors } from '../model/draft-errors';
import type { ReadingDraft } from '../model/reading-draft';
import { BitsField } from './BitsField';
import { FormPart } from './FormPart';

export interface LayoutFormProps {
  draft: ReadingDraft;
  errors: DraftErrors;
  datasets: readonly DatasetFact[];
  onChange(part: Partial<ReadingDraft>): void;
}

const FORMATS = [
  { value: 'hdf5-tags', label: 'HDF5, time tags' },
  { value: 'hdf5-frames', label: 'HDF5, frames' },
  { value: 'records', label: 'fixed-width records' },
] as const;

/** How the bytes of the file become tags or frames. */
export function LayoutForm({ draft, errors, datasets, onChange }: LayoutFormProps) {
  return (
    <FormPart title="layout">
      <div className="flex flex-col gap-3">
        <Field layout="row" label="Format">
          {(control) => (
            <Select
              {...control}
              value={draft.format}
              options={FORMATS}
              onValueChange={(value) => {
                const format = FORMATS.find((option) => option.value === value)?.value;
                if (format !== undefined) onChange({ format });
              }}
            />
          )}
        </Field>
        {draft.format === 'hdf5-tags' ? (
          <>
            <ColumnField
              label="Times"
              column={draft.time}
              error={errors.time}
              datasets={datasets}
              onChange={(time) => onChange({ time })}
            />
            <ColumnField
              label="Channels"
              column={draft.channel}
              error={errors.channel}
              datasets={datasets}
              onChange={(channel) => onChange({ channel })}
            />
          </>
        ) : null}
        {draft.format === 'hdf5-frames' ? (
          <Field layout="row" label="Frames" error={errors.frames}>
            {(control) => (
              <Select
                {...control}
                value={draft.frames ?? undefined}
                placeholder="choose a dataset"
                options={frameOptions(datasets)}
                onValueChange={(frames) => onChange({ frames })}
              />
            )}
          </Field>
        ) : null}
        {draft.format === 'records' ? (
          <RecordFields draft={draft} errors={errors} onChange={onChange} />
        ) : null}
        {draft.format === 'hdf5-frames' ? null : (
          <NumberField
            label="Tick length"
            value={draft.tickPs}
            unit="ps"
            placeholder="missing"
            error={errors.tickPs}
            hint="Time that one count of the clock stands for."
            onChange={(tickPs) => onChange({ tickPs })}
          />
        )}
      </div>
    </FormPart>
  );
}

interface ColumnFieldProps {
  label: string;
  column: Column | null;
  error: string | undefined;
  datasets: readonly DatasetFact[];
  onChange(column: Column): void;
}

function ColumnField({ label, column, error, datasets, onChange }: ColumnFieldProps) {
  const options = columnOptions(datasets);
  const value = column === null ? undefined : JSON.stringify([column.dataset, column.field ?? null]);
  return (
    <Field layout="row" label={label} error={error}>
      {(control) => (
        <Select
          {...control}
          value={value}
          placeholder="choose a column"
          options={options}
          onValueChange={(chosen) => {
            const option = options.find((candidate) => candidate.value === chosen);
            if (option !== undefined) onChange(option.column);
          }}
        />
      )}
    </Field>
  );
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

function RecordFields({ draft, errors, onChange }: Omit<LayoutFormProps, 'datasets'>) {
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
