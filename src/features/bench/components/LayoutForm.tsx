import type { DatasetFact } from '../../../../shared/contracts/engine';
import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import type { DraftErrors } from '../model/draft-errors';
import { isFrameFormat, type LayoutDraft } from '../model/layout-draft';
import { ColumnFields } from './ColumnFields';
import { FormPart } from './FormPart';
import { RecordFields } from './RecordFields';
import { TextFields } from './TextFields';

export interface LayoutFormProps {
  draft: LayoutDraft;
  errors: DraftErrors;
  datasets: readonly DatasetFact[];
  /** Kinds that can be chosen; a second clock has tags only. */
  tagsOnly?: boolean;
  onChange(part: Partial<LayoutDraft>): void;
}

const FORMATS = [
  { value: 'hdf5-tags', label: 'HDF5, time tags' },
  { value: 'hdf5-frames', label: 'HDF5, frames' },
  { value: 'npy-tags', label: 'NumPy, time tags' },
  { value: 'npy-frames', label: 'NumPy, frames' },
  { value: 'tiff', label: 'TIFF, frames' },
  { value: 'text', label: 'text, time tags' },
  { value: 'records', label: 'fixed-width records' },
] as const;

/** How the bytes of the file become tags or frames. */
export function LayoutForm({ draft, errors, datasets, tagsOnly = false, onChange }: LayoutFormProps) {
  const fields = { draft, errors, onChange };
  return (
    <FormPart title="layout">
      <div className="flex flex-col gap-3">
        <Field layout="row" label="Format">
          {(control) => (
            <Select
              {...control}
              value={draft.format}
              options={FORMATS.filter(({ value }) => !tagsOnly || !isFrameFormat(value))}
              onValueChange={(value) => {
                const format = FORMATS.find((option) => option.value === value)?.value;
                if (format !== undefined) onChange({ format });
              }}
            />
          )}
        </Field>
        {draft.format === 'records' ? <RecordFields {...fields} /> : null}
        {draft.format === 'text' ? <TextFields {...fields} /> : null}
        {draft.format === 'tiff' ? (
          <p className="text-sm text-dim">
            Every page is a frame, in the order of the file. There is nothing to choose: all pages must have
            one size and one type of sample.
          </p>
        ) : null}
        {draft.format === 'records' || draft.format === 'text' || draft.format === 'tiff' ? null : (
          <ColumnFields {...fields} datasets={datasets} />
        )}
        {isFrameFormat(draft.format) ? null : (
          <NumberField
            label="Tick length"
            value={draft.tickPs}
            unit="ps"
            placeholder="missing"
            error={errors.tickPs}
            hint={
              draft.format === 'text'
                ? 'Times are rounded to whole ticks of this length.'
                : 'Time that one count of the clock stands for.'
            }
            onChange={(tickPs) => onChange({ tickPs })}
          />
        )}
      </div>
    </FormPart>
  );
}
