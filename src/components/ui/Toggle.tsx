import { Switch } from 'radix-ui';
import { type ReactNode, useId } from 'react';

export interface ToggleProps {
  label: ReactNode;
  checked: boolean;
  onChange(checked: boolean): void;
  disabled?: boolean;
}

export function Toggle({ label, checked, onChange, disabled }: ToggleProps) {
  const id = useId();
  return (
    <span className="inline-flex items-center gap-2 text-sm">
      <Switch.Root
        id={id}
        checked={checked}
        onCheckedChange={onChange}
        disabled={disabled}
        className="inline-flex h-4 w-7 items-center rounded-sm border border-control px-px data-disabled:border-line data-[state=checked]:bg-text"
      >
        <Switch.Thumb className="block h-2.5 w-2.5 bg-dim data-[state=checked]:translate-x-[13px] data-[state=checked]:bg-bg" />
      </Switch.Root>
      <label htmlFor={id} className={disabled ? 'text-faint' : 'text-text'}>
        {label}
      </label>
    </span>
  );
}
