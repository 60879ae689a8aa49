import type { ReactNode } from 'react';
import { CheckMark } from '../../../components/ui/CheckMark';

/** A sentence to be heeded, with its mark. */
export function Caution({ children }: { children: ReactNode }) {
  return (
    <p className="flex gap-2 font-sans text-sm text-text">
      <span className="pt-0.5">
        <CheckMark status="caution" />
      </span>
      <span className="min-w-0 wrap-anywhere">{children}</span>
    </p>
  );
}
