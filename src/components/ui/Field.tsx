import { type ComponentProps, type ReactNode, useId } from 'react';

export interface FieldControl {
  id: string;
  'aria-describedby': string | undefined;
  'aria-invalid': boolean | undefined;
}

export interface FieldProps {
  label: ReactNode;
  /** One line under the control: what it does. */
  hint?: ReactNode;
  /** A sentence; marks the control invalid. */
  error?: string | null;
  /** row: label left, control right, as for dials; stack: label above, as in forms. */
  layout?: 'row' | 'stack';
  /** Spread the argument on the control. */
  children(control: FieldControl): ReactNode;
}

export function Field({ label, hint, error, layout = 'stack', children }: FieldProps) {
  const id = useId();
  const described = [hint ? `${id}-hint` : '', error ? `${id}-error` : ''].filter(Boolean).join(' ');
  const control = children({
    id,
    'aria-describedby': described || undefined,
    'aria-invalid': error ? true : undefined,
  });
  return (
    <div className="min-w-0">
      <div className={layout === 'row' ? 'flex items-baseline justify-between gap-3' : 'flex flex-col gap-1'}>
        <label htmlFor={id} className="min-w-0 text-sm text-text">
          {label}
        </label>
        {control}
      </div>
      {hint ? (
        <p id={`${id}-hint`} className="mt-1 text-xs text-dim">
          {hint}
        </p>
      ) : null}
      {error ? (
        <p id={`${id}-error`} role="alert" className="mt-1 text-xs text-fail">
          {error}
        </p>
      ) : null}
    </div>
  );
}

const INPUT =
  'h-8 w-full rounded-sm border border-control bg-transparent px-2 text-sm text-text placeholder:text-faint ' +
  'aria-invalid:border-fail disabled:cursor-not-allowed disabled:border-line disabled:text-dim';

export function TextInput({ className = '', ...rest }: ComponentProps<'input'>) {
  return <input {...rest} className={`${INPUT} ${className}`} />;
}
