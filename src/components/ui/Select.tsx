import { getNonce } from 'get-nonce';
import { Check, ChevronDown } from 'lucide-react';
import { Select as RadixSelect } from 'radix-ui';

export interface SelectOption {
  /** Never empty. */
  value: string;
  label: string;
  /** Second line, dim. */
  hint?: string;
  disabled?: boolean;
}

export interface SelectProps {
  value: string | undefined;
  onValueChange(value: string): void;
  options: readonly SelectOption[];
  placeholder?: string;
  disabled?: boolean;
  id?: string;
  /** Needed unless a Field labels it. */
  'aria-label'?: string;
  'aria-describedby'?: string;
  'aria-invalid'?: boolean;
  className?: string;
}

export function Select({ value, onValueChange, options, placeholder, className = '', ...rest }: SelectProps) {
  const { disabled, ...aria } = rest;
  return (
    <RadixSelect.Root value={value ?? ''} onValueChange={onValueChange} disabled={disabled}>
      <RadixSelect.Trigger
        {...aria}
        className={`inline-flex h-7 max-w-full items-center justify-between gap-2 border-b border-control px-1 font-mono text-sm text-text hover:bg-shade disabled:cursor-not-allowed disabled:text-faint aria-invalid:border-fail data-placeholder:text-faint ${className}`}
      >
        <span className="min-w-0 truncate">
          <RadixSelect.Value placeholder={placeholder} />
        </span>
        <ChevronDown size={14} aria-hidden="true" className="shrink-0 text-dim" />
      </RadixSelect.Trigger>
      <RadixSelect.Portal>
        <RadixSelect.Content
          position="popper"
          sideOffset={4}
          collisionPadding={8}
          className="z-50 max-h-(--radix-select-content-available-height) min-w-(--radix-select-trigger-width) overflow-hidden rounded-sm border border-strong bg-raised"
        >
          {/* Its scroll bar rule is an inline sheet, let in by the page's nonce. */}
          <RadixSelect.Viewport nonce={getNonce()} className="p-1">
            {options.map((option) => (
              <Option key={option.value} option={option} />
            ))}
          </RadixSelect.Viewport>
        </RadixSelect.Content>
      </RadixSelect.Portal>
    </RadixSelect.Root>
  );
}

function Option({ option }: { option: SelectOption }) {
  return (
    <RadixSelect.Item
      value={option.value}
      disabled={option.disabled}
      className="relative cursor-default rounded-sm py-1 pr-3 pl-6 text-sm text-text outline-none select-none data-disabled:text-faint data-highlighted:bg-shade"
    >
      <RadixSelect.ItemIndicator className="absolute top-1.5 left-1">
        <Check size={14} aria-hidden="true" />
      </RadixSelect.ItemIndicator>
      <RadixSelect.ItemText>{option.label}</RadixSelect.ItemText>
      {option.hint ? <span className="block text-xs text-dim">{option.hint}</span> : null}
    </RadixSelect.Item>
  );
}
