import type { ComponentProps } from 'react';

export type ButtonVariant = 'plain' | 'primary' | 'quiet' | 'danger';

export interface ButtonProps extends ComponentProps<'button'> {
  /** plain: bordered; primary: filled, one a view; quiet: text only; danger: for what cannot be undone. */
  variant?: ButtonVariant;
  size?: 'sm' | 'md';
}

const BASE =
  'inline-flex items-center justify-center gap-1.5 rounded-sm border whitespace-nowrap select-none ' +
  'disabled:cursor-not-allowed disabled:text-faint disabled:border-line';

const VARIANTS: Record<ButtonVariant, string> = {
  plain: 'border-control text-text hover:bg-shade active:bg-line disabled:bg-transparent',
  primary: 'border-text bg-text text-bg hover:bg-pair active:bg-dim disabled:bg-transparent',
  quiet:
    'border-transparent text-dim hover:text-text hover:bg-shade disabled:bg-transparent disabled:border-transparent',
  danger: 'border-fail text-fail hover:bg-shade active:bg-line disabled:bg-transparent',
};

const SIZES = { sm: 'h-6 px-2 text-xs', md: 'h-8 px-3 text-sm' };

export function buttonClass(variant: ButtonVariant, size: 'sm' | 'md'): string {
  return `${BASE} ${VARIANTS[variant]} ${SIZES[size]}`;
}

export function Button({
  variant = 'plain',
  size = 'md',
  className = '',
  type = 'button',
  ...rest
}: ButtonProps) {
  return <button {...rest} type={type} className={`${buttonClass(variant, size)} ${className}`} />;
}
