import { Button } from '../../../components/ui/Button';
import { Field, TextInput } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import { Toggle } from '../../../components/ui/Toggle';
import type { DraftErrors } from '../model/draft-errors';
import { isFrameFormat } from '../model/layout-draft';
import { type ArrayDraft, emptyArray, type ReadingDraft } from '../model/reading-draft';
import { FormPart } from './FormPart';

export interface DetectorFormProps {
  draft: ReadingDraft;
  errors: DraftErrors;
  /** What the map was proposed from, in a sentence; null where it is a person's. */
  proposedFrom: string | null;
  onChange(part: Partial<ReadingDraft>): void;
  /** Fills it from the channels seen. */
  onPropose(): void;
}

/** Channel or pixel -> arm, array, x, y; pitch, mask, delays. */
export function DetectorForm({ draft, errors, proposedFrom, onChange, onPropose }: DetectorFormProps) {
  const isFrames = isFrameFormat(draft.format);
  return (
    <FormPart
      title="detector map"
      actions={
        isFrames ? undefined : (
          <Button size="sm" onClick={onPropose}>
            Propose from the channels
          </Button>
        )
      }
    >
      <p role="status" className={proposedFrom === null ? 'sr-only' : 'mb-3 text-sm text-dim'}>
        {proposedFrom}
      </p>
      {isFrames ? (
        <div className="flex flex-col gap-3">
          <NumberField
            label="Pixel pitch"
            value={draft.framePitchUm}
            unit="um"
            min={0.001}
            max={1e5}
            placeholder="not given"
            error={errors['frames.pitchUm']}
            onChange={(framePitchUm) => onChange({ framePitchUm })}
          />
          <MaskField
            label="Masked pixels"
            value={draft.frameMasked}
            error={errors['frames.masked']}
            onChange={(frameMasked) => onChange({ frameMasked })}
          />
        </div>
      ) : (
        <div className="flex flex-col gap-5">
          {(['signal', 'idler'] as const).map((arm) => (
            <ArmFields
              key={arm}
              arm={arm}
              array={draft[arm]}
              errors={errors}
              onChange={(array) => onChange({ [arm]: array })}
            />
          ))}
          <BucketFields draft={draft} errors={errors} onChange={onChange} />
          {errors.arms === undefined ? null : (
            <p role="alert" className="text-xs text-fail">
              {errors.arms}
            </p>
          )}
        </div>
      )}
    </FormPart>
  );
}

interface ArmFieldsProps {
  arm: 'signal' | 'idler';
  array: ArrayDraft | null;
  errors: DraftErrors;
  onChange(array: ArrayDraft | null): void;
}

const TONES = { signal: 'text-signal', idler: 'text-idler' } as const;

function ArmFields({ arm, array, errors, onChange }: ArmFieldsProps) {
  const set = (part: Partial<ArrayDraft>): void => {
    if (array !== null) onChange({ ...array, ...part });
  };
  const error = (field: string): string | null => errors[`${arm}.${field}`] ?? null;
  return (
    <fieldset className="flex flex-col gap-2.5">
      <legend className="sr-only">{arm} array</legend>
      <div className="flex items-center justify-between">
        <span aria-hidden="true" className={`font-mono text-sm ${TONES[arm]}`}>
          {arm}
        </span>
        <Toggle
          label={<Present of={`${arm} array`} />}
          checked={array !== null}
          onChange={(on) => onChange(on ? emptyArray(null) : null)}
        />
      </div>
      {array === null ? null : (
        <div className="grid grid-cols-2 gap-x-6 gap-y-2.5">
          <NumberField
            label="First channel"
            value={array.firstChannel}
            integer
            min={0}
            max={65535}
            placeholder="missing"
            error={error('firstChannel')}
            onChange={(firstChannel) => set({ firstChannel })}
          />
          <NumberField
            label="Pixel pitch"
            value={array.pitchUm}
            unit="um"
            min={0.001}
            max={1e5}
            placeholder="not given"
            error={error('pitchUm')}
            onChange={(pitchUm) => set({ pitchUm })}
          />
          <NumberField
            label="Width"
            value={array.width}
            unit="pixels"
            integer
            min={1}
            max={1024}
            placeholder="missing"
            error={error('width')}
            onChange={(width) => set({ width })}
          />
          <NumberField
            label="Height"
            value={array.height}
            unit="pixels"
            integer
            min={1}
            max={1024}
            placeholder="missing"
            error={error('height')}
            onChange={(height) => set({ height })}
          />
          <Field layout="row" label="Numbered along">
            {(control) => (
              <Select
                {...control}
                value={array.order}
                options={[
                  { value: 'rows', label: 'rows' },
                  { value: 'columns', label: 'columns' },
                ]}
                onValueChange={(value) => set({ order: value === 'columns' ? 'columns' : 'rows' })}
              />
            )}
          </Field>
          <NumberField
            label="Delay added"
            value={array.delayPs}
            unit="ps"
            error={error('delayPs')}
            onChange={(delayPs) => set({ delayPs })}
          />
          <Toggle label={`Flip ${arm} x`} checked={array.flipX} onChange={(flipX) => set({ flipX })} />
          <Toggle label={`Flip ${arm} y`} checked={array.flipY} onChange={(flipY) => set({ flipY })} />
          <div className="col-span-2">
            <MaskField
              label="Masked pixels"
              value={array.masked}
              error={error('masked') ?? undefined}
              onChange={(masked) => set({ masked })}
            />
          </div>
        </div>
      )}
    </fieldset>
  );
}

/** The name stands at the left; only who listens needs it again. */
function Present({ of }: { of: string }) {
  return (
    <>
      <span className="sr-only">{of} </span>present
    </>
  );
}

function BucketFields({ draft, errors, onChange }: Omit<DetectorFormProps, 'onPropose' | 'proposedFrom'>) {
  const { bucket } = draft;
  return (
    <fieldset className="flex flex-col gap-2.5">
      <legend className="sr-only">bucket</legend>
      <div className="flex items-center justify-between">
        <span aria-hidden="true" className="font-mono text-sm">
          bucket
        </span>
        <Toggle
          label={<Present of="bucket" />}
          checked={bucket !== null}
          onChange={(on) => onChange({ bucket: on ? { channel: null, delayPs: 0 } : null })}
        />
      </div>
      {bucket === null ? null : (
        <div className="grid grid-cols-2 gap-x-6">
          <NumberField
            label="Channel"
            value={bucket.channel}
            integer
            min={0}
            max={65535}
            placeholder="missing"
            error={errors['bucket.channel']}
            onChange={(channel) => onChange({ bucket: { ...bucket, channel } })}
          />
          <NumberField
            label="Delay added"
            value={bucket.delayPs}
            unit="ps"
            onChange={(delayPs) => onChange({ bucket: { ...bucket, delayPs } })}
          />
        </div>
      )}
    </fieldset>
  );
}

interface MaskFieldProps {
  label: string;
  value: string;
  error: string | undefined;
  onChange(value: string): void;
}

function MaskField({ label, value, error, onChange }: MaskFieldProps) {
  return (
    <Field label={label} error={error} hint="Pixel numbers, y × width + x, with commas between.">
      {(control) => (
        <TextInput
          {...control}
          className="font-mono"
          value={value}
          onChange={(event) => onChange(event.target.value)}
        />
      )}
    </Field>
  );
}
