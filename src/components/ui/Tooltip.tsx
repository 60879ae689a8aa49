import { Tooltip as RadixTooltip } from 'radix-ui';
import type { ReactNode } from 'react';
import { Kbd } from './Kbd';

export interface TooltipProps {
  content: ReactNode;
  shortcut?: string;
  side?: 'top' | 'right' | 'bottom' | 'left';
  /** One focusable element. */
  children: ReactNode;
}

/** Goes once around the page. */
export function TooltipProvider({ children }: { children: ReactNode }) {
  return <RadixTooltip.Provider delayDuration={450}>{children}</RadixTooltip.Provider>;
}

export function Tooltip({ content, shortcut, side = 'bottom', children }: TooltipProps) {
  return (
    <RadixTooltip.Root>
      <RadixTooltip.Trigger asChild>{children}</RadixTooltip.Trigger>
      <RadixTooltip.Portal>
        <RadixTooltip.Content
          side={side}
          sideOffset={6}
          collisionPadding={8}
          className="z-50 flex max-w-80 items-center gap-2 rounded-sm border border-strong bg-raised px-2 py-1 text-xs text-text"
        >
          {content}
          {shortcut ? <Kbd>{shortcut}</Kbd> : null}
        </RadixTooltip.Content>
      </RadixTooltip.Portal>
    </RadixTooltip.Root>
  );
}
