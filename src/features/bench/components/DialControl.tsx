import type { DialSpec, DialValue } from '../../../../shared/contracts/dial';
import { isRegion } from '../../../components/output/dial-marks';
import { Button } from '../../../components/ui/Button';
import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import { Toggle } from '../../../components/ui/Toggle';
import { formatPlain } from '../../../lib/format-number';

export interface ChosenValue {
  /** Acquisition it was chosen for; empty where there is one only. */
  part: string;
  value: number;
}

export interface DialControlProps {
  spec: DialSpec;
  value: DialValue;
  /** What the study chose where the dial is left to it; empty before it ran. */
  chosen: readonly ChosenValue[];
  changed: boolean;
  readOnly: boolean;
  onTurn(value: DialValue): void;
}

/** One dial: label, value with unit and limits, its reason, and whether the study chooses. */
export function DialControl(props: DialControlProps) {
  const { spec, value, changed, readOnly, onTurn } = props;
  if (spec.type === 'choice') {
    return (
      <Field layout="row" label={<Label spec={spec} changed={changed} />} hint={spec.reason}>
        {(control) => (
          <Select
            {...control}
            value={typeof value === 'string' ? value : spec.default}
            options={spec.options}
            disabled={readOnly}
            onValueChange={onTurn}
          />
        )}
      </Field>
    );
  }
  if (spec.type === 'region') return <RegionDial {...props} spec={spec} />;
  return <NumberDial {...props} spec={spec} />;
}

function Label({ spec, changed }: { spec: DialSpec; changed: boolean }) {
  return (
    <>
      {spec.label}
      {changed ? <span className="sr-only"> (changed)</span> : null}
    </>
  );
}

type NumberSpec = Extract<DialSpec, { type: 'number' | 'integer' }>;

function NumberDial({
  spec,
  value,
  chosen,
  changed,
  readOnly,
  onTurn,
}: DialControlProps & { spec: NumberSpec }) {
  const isAuto = spec.auto && value === null;
  const number = typeof value === 'number' ? value : null;
  const first = chosen[0]?.value ?? null;
  const isOne = chosen.every((entry) => entry.value === first);
  const partWords = chosen.map((entry) => `${entry.part} ${formatPlain(entry.value, 5)}`).join(' · ');
  return (
    <div data-dial={spec.id}>
      <NumberField
        label={spec.label}
        value={number}
        unit={spec.unit}
        min={spec.min}
        max={spec.max}
        step={spec.step}
        integer={spec.type === 'integer'}
        changed={changed}
        disabled={readOnly}
        placeholder={first !== null && isOne ? formatPlain(first, 5) : 'auto'}
        hint={spec.reason}
        onChange={onTurn}
      />
      {spec.auto ? (
        <div className="mt-1.5 flex items-center justify-between gap-2 text-dim">
          <Toggle
            label={
              <>
                <span className="sr-only">{spec.label}: </span>
                <span className="text-xs">study chooses</span>
              </>
            }
            checked={isAuto}
            disabled={readOnly || (isAuto && first === null)}
            onChange={(auto) => onTurn(auto ? null : first)}
          />
          <span className="font-mono text-xs">{isAuto ? (isOne ? '' : partWords) : 'set by hand'}</span>
        </div>
      ) : null}
    </div>
  );
}

function RegionDial({ spec, value, changed, readOnly, onTurn }: DialControlProps) {
  return (
    <div data-dial={spec.id}>
      <div className="flex items-baseline justify-between gap-3">
        <span className="text-sm">
          <Label spec={spec} changed={changed} />
        </span>
        <span className="flex items-baseline gap-2 font-mono text-xs text-dim">
          {isRegion(value) ? (
            <>
              x {value.x0}–{value.x1}, y {value.y0}–{value.y1}
              <Button size="sm" variant="quiet" disabled={readOnly} onClick={() => onTurn(null)}>
                Clear<span className="sr-only"> {spec.label}</span>
              </Button>
            </>
          ) : (
            'draw it on the image'
          )}
        </span>
      </div>
      <p className="mt-1 text-xs text-dim">{spec.reason}</p>
    </div>
  );
}
