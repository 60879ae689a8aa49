export interface MarkProps {
  /** Width in CSS pixels or any CSS length; the height is 0.6 of it. */
  size?: number | string;
}

/** The mark: two thin bars borne together, signal over idler. Decorative; the name stands beside it. */
export function Mark({ size = 22 }: MarkProps) {
  return (
    <svg viewBox="0 0 22 13" width={size} style={{ height: 'auto' }} aria-hidden="true" focusable="false">
      <rect x="0" y="2.6" width="22" height="1.8" fill="var(--color-signal)" />
      <rect x="0" y="8.6" width="22" height="1.8" fill="var(--color-idler)" />
    </svg>
  );
}
