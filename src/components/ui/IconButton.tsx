import type { ComponentProps, ReactNode } from 'react';
import { Tooltip } from './Tooltip';

export interface IconButtonProps extends Omit<ComponentProps<'button'>, 'aria-label' | 'children'> {
  /** The name: read out, and shown as a tooltip. */
  label: string;
  /** Key that does the same, shown in the tooltip. */
  shortcut?: string;
  /** The icon, about 16 px. */
  children: ReactNode;
  /** For toggles. */
  pressed?: boolean;
}

export function IconButton({
  label,
  shortcut,
  children,
  pressed,
  className = '',
  type = 'button',
  ...rest
}: IconButtonProps) {
  return (
    <Tooltip content={label} shortcut={shortcut}>
      <button
        {...rest}
        type={type}
        aria-label={label}
        aria-pressed={pressed}
        className={`inline-flex size-7 items-center justify-center rounded-sm text-dim hover:bg-shade hover:text-text disabled:cursor-not-allowed disabled:bg-transparent disabled:text-faint aria-pressed:bg-shade aria-pressed:text-text ${className}`}
      >
        {children}
      </button>
    </Tooltip>
  );
}
