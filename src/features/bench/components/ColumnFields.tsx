import type { DatasetFact } from '../../../../shared/contracts/engine';
import { Field } from '../../../components/ui/Field';
import { Select } from '../../../components/ui/Select';
import { type ColumnOption, columnOptions, frameOptions, toArrayColumn } from '../model/column-options';
import type { DraftErrors } from '../model/draft-errors';
import type { LayoutDraft } from '../model/layout-draft';

export interface ColumnFieldsProps {
  draft: LayoutDraft;
  errors: DraftErrors;
  datasets: readonly DatasetFact[];
  onChange(part: Partial<LayoutDraft>): void;
}

/** Which datasets of an HDF5 file, or arrays of a NumPy file, hold times and channels, or frames. */
export function ColumnFields({ draft, errors, datasets, onChange }: ColumnFieldsProps) {
  const fields = { errors, datasets };
  switch (draft.format) {
    case 'hdf5-tags':
      return (
        <TagColumns
          {...fields}
          time={draft.time}
          channel={draft.channel}
          onTime={({ column }) => onChange({ time: column })}
          onChannel={({ column }) => onChange({ channel: column })}
        />
      );
    case 'npy-tags':
      return (
        <TagColumns
          {...fields}
          time={draft.arrayTime && { dataset: draft.arrayTime.array ?? '', field: draft.arrayTime.field }}
          channel={
            draft.arrayChannel && { dataset: draft.arrayChannel.array ?? '', field: draft.arrayChannel.field }
          }
          onTime={({ column }) => onChange({ arrayTime: toArrayColumn(column) })}
          onChannel={({ column }) => onChange({ arrayChannel: toArrayColumn(column) })}
        />
      );
    case 'npy-frames':
      return (
        <FramesField
          {...fields}
          what="array"
          value={draft.arrayFrames === null ? null : (draft.arrayFrames.array ?? '')}
          onChange={(array) => onChange({ arrayFrames: array === '' ? {} : { array } })}
        />
      );
    default:
      return (
        <FramesField
          {...fields}
          what="dataset"
          value={draft.frames}
          onChange={(frames) => onChange({ frames })}
        />
      );
  }
}

interface Place {
  dataset: string;
  field?: string | number | undefined;
}

interface TagColumnsProps extends Pick<ColumnFieldsProps, 'errors' | 'datasets'> {
  time: Place | null;
  channel: Place | null;
  onTime(option: ColumnOption): void;
  onChannel(option: ColumnOption): void;
}

function TagColumns({ errors, datasets, time, channel, onTime, onChannel }: TagColumnsProps) {
  const options = columnOptions(datasets);
  const column = (label: string, place: Place | null, error: string | undefined, onChange: typeof onTime) => (
    <Field layout="row" label={label} error={error}>
      {(control) => (
        <Select
          {...control}
          value={place === null ? undefined : JSON.stringify([place.dataset, place.field ?? null])}
          placeholder="choose a column"
          options={options}
          onValueChange={(chosen) => {
            const option = options.find((candidate) => candidate.value === chosen);
            if (option !== undefined) onChange(option);
          }}
        />
      )}
    </Field>
  );
  return (
    <>
      {column('Times', time, errors.time, onTime)}
      {column('Channels', channel, errors.channel, onChannel)}
    </>
  );
}

interface FramesFieldProps extends Pick<ColumnFieldsProps, 'errors' | 'datasets'> {
  what: 'array' | 'dataset';
  /** Path of the dataset; '' for the one array of a file that names none. */
  value: string | null;
  onChange(path: string): void;
}

function FramesField({ errors, datasets, what, value, onChange }: FramesFieldProps) {
  const options = frameOptions(datasets);
  return (
    <Field layout="row" label="Frames" error={errors.frames}>
      {(control) => (
        <Select
          {...control}
          value={value === null ? undefined : JSON.stringify(value)}
          placeholder={`choose ${what === 'array' ? 'an array' : 'a dataset'}`}
          options={options}
          onValueChange={(chosen) => {
            const option = options.find((candidate) => candidate.value === chosen);
            if (option !== undefined) onChange(option.path);
          }}
        />
      )}
    </Field>
  );
}
