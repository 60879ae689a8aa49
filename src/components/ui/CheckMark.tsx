export interface CheckMarkProps {
  status: 'pass' | 'caution' | 'fail';
  /** Show the word beside the glyph; otherwise it is there for screen readers only. */
  withText?: boolean;
}

const STROKE = { fill: 'none', stroke: 'currentColor', strokeWidth: 1.4 } as const;

const GLYPHS = {
  pass: <circle cx="7" cy="7" r="4.6" {...STROKE} />,
  caution: <path d="M7 2 L12.4 11.6 H1.6 Z" strokeLinejoin="round" {...STROKE} />,
  fail: (
    <path d="M2.6 2.6 L11.4 11.4 M11.4 2.6 L2.6 11.4" strokeLinecap="round" {...STROKE} strokeWidth={1.8} />
  ),
};

const COLOURS = { pass: 'text-dim', caution: 'text-warn', fail: 'text-fail' };

/** A hollow circle passes, a triangle cautions, a cross fails: the shape says it, the colour repeats it. */
export function CheckMark({ status, withText = false }: CheckMarkProps) {
  return (
    <span className={`inline-flex items-center gap-1.5 ${COLOURS[status]}`}>
      <svg viewBox="0 0 14 14" className="size-[1.05em] shrink-0" aria-hidden="true">
        {GLYPHS[status]}
      </svg>
      <span className={withText ? 'font-mono' : 'sr-only'}>{status}</span>
    </span>
  );
}
