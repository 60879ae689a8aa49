import type { ReactNode } from 'react';

export interface Fact {
  name: string;
  value: ReactNode;
}

/** Names and values on a common edge; values in mono, as they come from files and settings. */
export function Facts({ facts }: { facts: readonly Fact[] }) {
  return (
    <dl className="grid grid-cols-[minmax(5.5rem,auto)_1fr] gap-x-4 gap-y-1 py-2">
      {facts.map(({ name, value }) => (
        <div key={name} className="contents">
          <dt className="text-dim">{name}</dt>
          <dd className="min-w-0 font-mono text-xs leading-5 break-words">{value}</dd>
        </div>
      ))}
    </dl>
  );
}

/** Several short lines as one value. */
export function Lines({ lines }: { lines: readonly string[] }) {
  return lines.map((line) => (
    <span key={line} className="block">
      {line}
    </span>
  ));
}
