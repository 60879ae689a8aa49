import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import type { DraftErrors } from '../model/draft-errors';
import type { NumberDraft, PlaneDraft, ReadingDraft } from '../model/reading-draft';
import { FormPart } from './FormPart';

export interface PlaneFormProps {
  draft: ReadingDraft;
  errors: DraftErrors;
  onChange(part: Partial<ReadingDraft>): void;
}

const KINDS = [
  { value: 'none', label: 'not calibrated' },
  { value: 'near', label: 'near field (position)' },
  { value: 'far', label: 'far field (momentum)' },
] as const;

/** Near or far field, with its calibration; each number carries its uncertainty into the witness. */
export function PlaneForm({ draft, errors, onChange }: PlaneFormProps) {
  const { plane } = draft;
  const set = (part: Partial<PlaneDraft>): void => onChange({ plane: { ...plane, ...part } });
  return (
    <FormPart title="plane">
      <div className="flex flex-col gap-3">
        <Field layout="row" label="Plane">
          {(control) => (
            <Select
              {...control}
              value={plane.kind}
              options={KINDS}
              onValueChange={(value) => {
                const kind = KINDS.find((option) => option.value === value)?.value;
                if (kind !== undefined) set({ kind });
              }}
            />
          )}
        </Field>
        {plane.kind === 'near' ? (
          <CalibratedField
            label="Magnification"
            unit=""
            value={plane.magnification}
            error={errors['plane.magnification']}
            hint="Size of the image on the detector over the size in the crystal."
            onChange={(magnification) => set({ magnification })}
          />
        ) : null}
        {plane.kind === 'far' ? (
          <>
            <CalibratedField
              label="Focal length"
              unit="mm"
              value={plane.focalLengthMm}
              error={errors['plane.focalLengthMm']}
              hint="Effective, of the whole train of lenses."
              onChange={(focalLengthMm) => set({ focalLengthMm })}
            />
            <CalibratedField
              label="Signal wavelength"
              unit="nm"
              value={plane.signalNm}
              error={errors['plane.signalNm']}
              hint="In vacuum."
              onChange={(signalNm) => set({ signalNm })}
            />
            <CalibratedField
              label="Idler wavelength"
              unit="nm"
              value={plane.idlerNm}
              error={errors['plane.idlerNm']}
              hint="In vacuum."
              onChange={(idlerNm) => set({ idlerNm })}
            />
          </>
        ) : null}
        {plane.kind === 'none' ? (
          <p className="text-sm text-dim">
            Without a calibration the delay and the image can be had; widths and witnesses need one.
          </p>
        ) : null}
      </div>
    </FormPart>
  );
}

interface CalibratedFieldProps {
  label: string;
  unit: string;
  value: NumberDraft;
  error: string | undefined;
  hint: string;
  onChange(value: NumberDraft): void;
}

function CalibratedField({ label, unit, value, error, hint, onChange }: CalibratedFieldProps) {
  return (
    <div className="grid grid-cols-[1fr_auto] items-baseline gap-x-3">
      <NumberField
        label={label}
        unit={unit}
        value={value.value}
        min={0}
        placeholder="missing"
        hint={hint}
        error={error}
        onChange={(next) => onChange({ ...value, value: next })}
      />
      <NumberField
        label={
          <>
            ±<span className="sr-only"> uncertainty of {label}</span>
          </>
        }
        unit={unit}
        value={value.sigma}
        min={0}
        placeholder="missing"
        onChange={(sigma) => onChange({ ...value, sigma })}
      />
    </div>
  );
}
