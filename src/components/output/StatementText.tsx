import { useState } from 'react';
import { Button } from '../ui/Button';

/** A paragraph to paste; copying may be forbidden to the page, and then it says so. */
export function StatementText({ text }: { text: string }) {
  const [said, setSaid] = useState('');
  const copy = async (): Promise<void> => {
    try {
      await navigator.clipboard.writeText(text);
      setSaid('Copied.');
    } catch (error) {
      const reason = error instanceof Error ? error.message : String(error);
      setSaid(`The browser did not let the page copy (${reason}). Select the text and copy it.`);
    }
  };
  return (
    <div className="flex flex-col items-start gap-2">
      <p className="max-w-prose text-sm text-dim select-text">{text}</p>
      <span className="flex items-center gap-3">
        <Button size="sm" onClick={() => void copy()}>
          Copy the statement
        </Button>
        <span role="status" className="text-xs text-dim">
          {said}
        </span>
      </span>
    </div>
  );
}
