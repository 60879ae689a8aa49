import { X } from 'lucide-react';
import { Dialog as RadixDialog } from 'radix-ui';
import type { ReactNode } from 'react';

export interface DialogProps {
  open: boolean;
  onOpenChange(open: boolean): void;
  title: string;
  /** One sentence under the title, also read out when the dialog opens. */
  description?: ReactNode;
  children: ReactNode;
  /** Buttons, right-aligned under a hairline. */
  footer?: ReactNode;
  size?: 'sm' | 'md' | 'lg';
}

const WIDTHS = { sm: 'max-w-md', md: 'max-w-2xl', lg: 'max-w-5xl' };

export function Dialog({
  open,
  onOpenChange,
  title,
  description,
  children,
  footer,
  size = 'md',
}: DialogProps) {
  const described = description === undefined ? { 'aria-describedby': undefined } : {};
  return (
    <RadixDialog.Root open={open} onOpenChange={onOpenChange}>
      <RadixDialog.Portal>
        <RadixDialog.Overlay className="fixed inset-0 z-40 bg-scrim" />
        <RadixDialog.Content
          {...described}
          className={`fixed top-1/2 left-1/2 z-40 flex max-h-[88vh] w-[calc(100vw-3rem)] -translate-x-1/2 -translate-y-1/2 flex-col border border-strong bg-bg focus:outline-none ${WIDTHS[size]}`}
        >
          <header className="flex items-start gap-4 border-b border-line px-5 py-3">
            <div className="min-w-0 flex-1">
              <RadixDialog.Title className="text-base font-semibold text-text">{title}</RadixDialog.Title>
              {description === undefined ? null : (
                <RadixDialog.Description className="mt-0.5 text-sm text-dim">
                  {description}
                </RadixDialog.Description>
              )}
            </div>
            <RadixDialog.Close
              aria-label="Close"
              className="inline-flex size-7 items-center justify-center rounded-sm text-dim hover:bg-shade hover:text-text"
            >
              <X size={16} aria-hidden="true" />
            </RadixDialog.Close>
          </header>
          {/* biome-ignore lint/a11y/noNoninteractiveTabindex: a region that scrolls must be reachable by keyboard */}
          <div className="min-h-0 flex-1 overflow-y-auto px-5 py-4" tabIndex={0}>
            {children}
          </div>
          {footer === undefined ? null : (
            <footer className="flex items-center justify-end gap-2 border-t border-line px-5 py-3">
              {footer}
            </footer>
          )}
        </RadixDialog.Content>
      </RadixDialog.Portal>
    </RadixDialog.Root>
  );
}
