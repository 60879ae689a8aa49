import {
  displayUnit,
  formatInterval,
  formatPlain,
  formatQuantity,
  formatWithSigma,
} from '../lib/format-number';
import { labelRows } from './LineMarks';
import { fitRulerAxis, placeRulerLabel, type RulerAxis } from './ruler-layout';
import type { BoundRulerProps, RulerEntry } from './types';
import { useBox } from './use-box';

/** Widths of a character in text sizes, a little more than the mono face has. */
const CHAR = 0.62;
const MARGIN = { left: 2.5, right: 2.5 };
const ROW = { bound: 2.7, entry: 1.6 };

/**
 * Measured values against their bounds on one axis: what was subtracted above the line with a filled diamond, what was
 * not below it with a hollow circle, each with its interval; bounds named and marked; the verdict in a sentence.
 */
export function BoundRuler(props: BoundRulerProps) {
  const { entries, bounds, sentence, assumption, side = 'below', title = null } = props;
  const [hostRef, { width, em }] = useBox<HTMLDivElement>();
  const left = MARGIN.left * em;
  const sorted = [...bounds].sort((a, b) => a.value - b.value);
  const labelWidths = sorted.map((b) => (Math.max(b.name.length, boundText(b).length) + 2) * em * CHAR);
  const axis = fitRulerAxis(props, { left, width, right: MARGIN.right * em }, sorted, labelWidths);
  const above = entries.filter((entry) => entry.label === 'accidentals subtracted');
  const below = entries.filter((entry) => entry.label === 'raw');
  const rows = labelRows(sorted.map((bound, i) => ({ x: axis.x(bound.value), width: labelWidths[i]! })));
  const boundsHeight = (Math.max(0, ...rows) + 1) * ROW.bound * em;
  const base = Math.round(boundsHeight + (above.length * ROW.entry + 0.5) * em);
  const foot = base + Math.max(1, below.length) * ROW.entry * em;
  const height = foot + em * 1.8;
  const walls = [...sorted.map((bound) => axis.x(bound.value)), width];
  const strictest = (side === 'below' ? sorted[0] : sorted[sorted.length - 1])?.value;
  return (
    <figure className="min-w-0" aria-label={title ?? 'Values against their bounds'}>
      <figcaption className="flex items-baseline justify-between gap-3">
        <span className="font-semibold">{title}</span>
        <span className="font-mono text-xs text-dim">{noteOf(props, axis)}</span>
      </figcaption>
      <div ref={hostRef} className="font-mono text-[length:var(--plot-text)]" style={{ height }}>
        {width === 0 ? null : (
          <svg role="img" aria-label={describeRuler(props)} width={width} height={height} fontSize={em}>
            {strictest !== undefined ? (
              <Shade axis={axis} side={side} at={strictest} top={boundsHeight} height={foot - boundsHeight} />
            ) : null}
            <RulerLine axis={axis} base={base} foot={foot} em={em} />
            {sorted.map((bound, i) => (
              <g key={bound.name} data-bound={bound.name}>
                <path
                  d={`M${axis.x(bound.value)} ${rows[i]! * ROW.bound * em + em * 0.2}V${foot}`}
                  stroke="var(--color-pair)"
                  strokeWidth="calc(var(--plot-line) * 1.2)"
                />
                <g
                  transform={`translate(${axis.x(bound.value) + em * 0.7} ${rows[i]! * ROW.bound * em})`}
                  stroke="var(--color-bg)"
                  strokeWidth={3}
                  paintOrder="stroke"
                >
                  <text y={em} fill="var(--color-text)" fontWeight={600} fontFamily="var(--font-sans)">
                    {bound.name}
                  </text>
                  <text y={em * 2.2} fill="var(--color-dim)">
                    {boundText(bound)}
                  </text>
                </g>
              </g>
            ))}
            {above.map((entry, i) => (
              <EntryMark
                key={entry.label}
                entry={entry}
                axis={axis}
                walls={walls}
                y={base - (i + 0.65) * ROW.entry * em}
                em={em}
              />
            ))}
            {below.map((entry, i) => (
              <EntryMark
                key={entry.label}
                entry={entry}
                axis={axis}
                walls={walls}
                y={base + (i + 0.6) * ROW.entry * em}
                em={em}
              />
            ))}
          </svg>
        )}
      </div>
      <p className="mt-1 text-sm">{sentence}</p>
      {assumption ? <p className="text-sm text-dim">{assumption}</p> : null}
    </figure>
  );
}

function boundText({ value, unit }: { value: number; unit: string }): string {
  return `bound ${formatPlain(value, 4)} ${displayUnit(unit)}`.trim();
}

function noteOf({ entries, bounds }: BoundRulerProps, axis: RulerAxis): string {
  const unit = displayUnit(entries[0]?.unit ?? bounds[0]?.unit ?? '1');
  const parts = [unit, axis.log ? 'log scale' : 'linear scale', '95 % interval'];
  return parts.filter((part) => part !== '').join(' · ');
}

function describeRuler({ entries, bounds, side = 'below' }: BoundRulerProps): string {
  const values = entries.map(
    (entry) => `${entry.label} ${formatQuantity(entry)}, interval ${formatInterval(entry.interval)}`,
  );
  const limits = bounds.map((bound) => `${bound.name} ${boundText(bound)}`);
  return `${values.join('; ')}. ${limits.join('; ')}. A value ${side} a bound breaks it.`;
}

interface ShadeProps {
  axis: RulerAxis;
  side: 'below' | 'above';
  at: number;
  top: number;
  height: number;
}

/** Where every bound is broken. */
function Shade({ axis, side, at, top, height }: ShadeProps) {
  const [from, to] = side === 'below' ? [axis.domain[0], at] : [at, axis.domain[1]];
  return (
    <rect
      x={axis.x(from)}
      y={top}
      width={Math.max(0, axis.x(to) - axis.x(from))}
      height={height}
      fill="var(--color-shade)"
    />
  );
}

function RulerLine({ axis, base, foot, em }: { axis: RulerAxis; base: number; foot: number; em: number }) {
  const [x0, x1] = [axis.x(axis.domain[0]), axis.x(axis.domain[1])];
  const minor = axis.minor.map((value) => `M${axis.x(value)} ${base}v3`).join('');
  const major = axis.ticks.map((value) => `M${axis.x(value)} ${base}v6`).join('');
  return (
    <g>
      <path
        d={`M${x0} ${base}H${x1}${minor}${major}`}
        fill="none"
        stroke="var(--color-dim)"
        strokeWidth="var(--plot-hair)"
      />
      {axis.ticks.map((value) => (
        <text key={value} x={axis.x(value)} y={foot + em * 1.3} textAnchor="middle" fill="var(--color-dim)">
          {axis.format(value)}
        </text>
      ))}
    </g>
  );
}

interface EntryMarkProps {
  entry: RulerEntry;
  axis: RulerAxis;
  /** Bounds and the edge of the plot, in pixels: no label may run across one. */
  walls: readonly number[];
  y: number;
  em: number;
}

/** Short on the ruler, where the caption gives the unit; in full for who points at it. */
const SHORT = { raw: 'raw', 'accidentals subtracted': 'subtracted' } as const;

function EntryMark({ entry, axis, walls, y, em }: EntryMarkProps) {
  const isRaw = entry.label === 'raw';
  const colour = isRaw ? 'var(--color-dim)' : 'var(--color-pair)';
  const at = axis.x(entry.value);
  const [lo, hi] = [axis.x(entry.interval[0]), axis.x(entry.interval[1])];
  const text = `${SHORT[entry.label]} ${formatWithSigma(entry.value, entry.sigma)}`;
  const size = em * 0.42;
  const mark = { from: Math.min(lo, at - size) - em * 0.7, to: Math.max(hi, at + size) + em * 0.7 };
  const label = placeRulerLabel(mark, text.length * em * CHAR, walls);
  return (
    <g data-entry={entry.label}>
      <title>{`${entry.label} ${formatQuantity(entry)}, 95 % interval ${formatInterval(entry.interval)}`}</title>
      <path
        d={`M${lo} ${y}H${hi}M${lo} ${y - size}v${2 * size}M${hi} ${y - size}v${2 * size}`}
        stroke={colour}
        strokeWidth="var(--plot-line)"
        fill="none"
      />
      {isRaw ? (
        <circle
          cx={at}
          cy={y}
          r={size}
          fill="var(--color-bg)"
          stroke={colour}
          strokeWidth="calc(var(--plot-line) * 1.2)"
        />
      ) : (
        <path
          d={`M${at} ${y - size * 1.2}L${at + size * 1.2} ${y}L${at} ${y + size * 1.2}L${at - size * 1.2} ${y}Z`}
          fill={colour}
        />
      )}
      <text
        x={label.x}
        y={y + em * 0.34}
        textAnchor={label.anchor}
        stroke="var(--color-bg)"
        strokeWidth={3}
        paintOrder="stroke"
        fill={isRaw ? 'var(--color-dim)' : 'var(--color-text)'}
      >
        {text}
      </text>
    </g>
  );
}
