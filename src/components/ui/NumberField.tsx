import { type KeyboardEvent, type ReactNode, useState } from 'react';
import { displayUnit } from '../../lib/format-number';
import { Field } from './Field';
import { parseNumber, stepNumber } from './parse-number';

export interface NumberFieldProps {
  label: ReactNode;
  /** null shows the placeholder ("chosen by the study"). */
  value: number | null;
  onChange(value: number): void;
  unit?: string;
  min?: number;
  max?: number;
  /** Moved by the arrow keys; ten times with Shift. */
  step?: number;
  integer?: boolean;
  hint?: ReactNode;
  error?: string | null;
  placeholder?: string;
  disabled?: boolean;
  layout?: 'row' | 'stack';
  /** Marks a value that differs from the preset: underline in amber, said to screen readers. */
  changed?: boolean;
}

/** Commits on Enter, on leaving and with every arrow key; Escape brings the last value back. */
export function NumberField(props: NumberFieldProps) {
  const { label, value, onChange, unit = '', step = 1, layout = 'row', changed = false } = props;
  const [draft, setDraft] = useState<string | null>(null);
  const [problem, setProblem] = useState<string | null>(null);
  const shown = draft ?? (value === null ? '' : String(value));

  const settle = (): void => {
    if (draft === null) return;
    const parsed = parseNumber(draft, props);
    setProblem(parsed.ok ? null : parsed.message);
    if (!parsed.ok) return;
    setDraft(null);
    if (parsed.value !== value) onChange(parsed.value);
  };
  const onKeyDown = (event: KeyboardEvent<HTMLInputElement>): void => {
    if (event.key === 'Enter') settle();
    else if (event.key === 'Escape' && draft !== null) {
      event.stopPropagation();
      setDraft(null);
      setProblem(null);
    } else if (event.key === 'ArrowUp' || event.key === 'ArrowDown') {
      event.preventDefault();
      const parsed = parseNumber(shown, props);
      const from = parsed.ok ? parsed.value : (value ?? props.min ?? 0);
      const delta = step * (event.shiftKey ? 10 : 1) * (event.key === 'ArrowUp' ? 1 : -1);
      setDraft(null);
      setProblem(null);
      onChange(stepNumber(from, delta, props));
    }
  };
  const title = changed ? (
    <>
      {label}
      <span className="sr-only"> (changed)</span>
    </>
  ) : (
    label
  );
  return (
    <Field label={title} hint={props.hint} error={problem ?? props.error} layout={layout}>
      {(control) => (
        <span
          className={`inline-flex items-baseline gap-1 border-b font-mono text-sm ${changed ? 'border-signal' : 'border-control'} has-aria-invalid:border-fail has-disabled:border-line`}
        >
          <input
            {...control}
            type="text"
            inputMode={props.integer ? 'numeric' : 'decimal'}
            autoComplete="off"
            spellCheck={false}
            disabled={props.disabled}
            placeholder={props.placeholder}
            value={shown}
            onChange={(event) => setDraft(event.target.value)}
            onBlur={settle}
            onKeyDown={onKeyDown}
            size={Math.max(4, shown.length || (props.placeholder?.length ?? 0))}
            className="min-w-0 bg-transparent px-1 py-0.5 text-right text-text placeholder:text-faint disabled:cursor-not-allowed disabled:text-dim"
          />
          {unit === '' || unit === '1' ? null : <span className="pr-1 text-dim">{displayUnit(unit)}</span>}
        </span>
      )}
    </Field>
  );
}
