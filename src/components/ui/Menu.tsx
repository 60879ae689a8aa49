import { DropdownMenu } from 'radix-ui';
import type { ReactNode } from 'react';
import { Kbd } from './Kbd';

export type MenuItem =
  | {
      kind?: 'action';
      label: string;
      onSelect(): void;
      shortcut?: string;
      disabled?: boolean;
      tone?: 'plain' | 'danger';
    }
  | { kind: 'check'; label: string; checked: boolean; onChange(checked: boolean): void; disabled?: boolean }
  | { kind: 'separator'; id: string }
  | { kind: 'heading'; label: string };

export interface MenuProps {
  /** One button. */
  trigger: ReactNode;
  items: readonly MenuItem[];
  align?: 'start' | 'center' | 'end';
}

const ITEM =
  'relative flex cursor-default items-center justify-between gap-6 rounded-sm py-1 pr-2 pl-6 text-sm outline-none ' +
  'select-none data-highlighted:bg-shade data-disabled:text-faint';

export function Menu({ trigger, items, align = 'start' }: MenuProps) {
  return (
    <DropdownMenu.Root>
      <DropdownMenu.Trigger asChild>{trigger}</DropdownMenu.Trigger>
      <DropdownMenu.Portal>
        <DropdownMenu.Content
          align={align}
          sideOffset={4}
          collisionPadding={8}
          className="z-50 min-w-44 rounded-sm border border-strong bg-raised p-1 text-text"
        >
          {items.map((item) => (
            <Item key={item.kind === 'separator' ? item.id : item.label} item={item} />
          ))}
        </DropdownMenu.Content>
      </DropdownMenu.Portal>
    </DropdownMenu.Root>
  );
}

function Item({ item }: { item: MenuItem }) {
  if (item.kind === 'separator') return <DropdownMenu.Separator className="my-1 h-px bg-line" />;
  if (item.kind === 'heading') {
    return (
      <DropdownMenu.Label className="px-2 py-1 font-mono text-xs text-dim">{item.label}</DropdownMenu.Label>
    );
  }
  if (item.kind === 'check') {
    return (
      <DropdownMenu.CheckboxItem
        checked={item.checked}
        onCheckedChange={item.onChange}
        disabled={item.disabled}
        className={ITEM}
      >
        <DropdownMenu.ItemIndicator className="absolute left-2 font-mono">·</DropdownMenu.ItemIndicator>
        {item.label}
      </DropdownMenu.CheckboxItem>
    );
  }
  return (
    <DropdownMenu.Item
      onSelect={item.onSelect}
      disabled={item.disabled}
      className={`${ITEM} ${item.tone === 'danger' ? 'text-fail' : ''}`}
    >
      {item.label}
      {item.shortcut ? <Kbd>{item.shortcut}</Kbd> : null}
    </DropdownMenu.Item>
  );
}
