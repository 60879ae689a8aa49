import type { ReactNode, RefObject } from 'react';

export interface PlotFrameProps {
  title: string | null;
  note?: ReactNode;
  /** What the cursor reads, or a hint while it is away. */
  readout: ReactNode;
  /** Explains marks of the plot: "2 σ", "masked". */
  keys?: ReactNode;
  /** Said once to screen readers, for moves by keyboard only. */
  announcement: string;
  height: number | undefined;
  hostRef: RefObject<HTMLDivElement | null>;
  children: ReactNode;
}

/** Caption, one line of read-out that is always there (so nothing jumps), and the box the plot is drawn in. */
export function PlotFrame(props: PlotFrameProps) {
  const { title, note, readout, keys, announcement, height, hostRef, children } = props;
  return (
    <figure
      className="flex min-h-0 min-w-0 flex-col"
      style={height === undefined ? { height: '100%' } : { height }}
      aria-label={title ?? undefined}
    >
      <figcaption className="flex flex-wrap items-baseline justify-between gap-x-3">
        {title === null ? null : <span className="min-w-0 truncate font-semibold">{title}</span>}
        {note === undefined ? null : (
          <span className="min-w-0 truncate font-mono text-xs text-dim">{note}</span>
        )}
      </figcaption>
      <div className="flex h-[1.6em] items-center justify-between gap-3 overflow-hidden font-mono text-[length:var(--plot-text)] whitespace-nowrap text-dim">
        <span className="min-w-0 shrink-0 max-w-full truncate" data-readout="">
          {readout}
        </span>
        <span className="flex min-w-0 items-center gap-3 overflow-hidden">{keys}</span>
      </div>
      <div ref={hostRef} className="relative min-h-0 flex-1 font-mono text-[length:var(--plot-text)]">
        {children}
      </div>
      <p className="sr-only" aria-live="polite">
        {announcement}
      </p>
    </figure>
  );
}
