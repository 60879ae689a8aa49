import { countInBins, simulatePairs } from '../model/pairs';

const SHOWN = 140;
/** The drawn pairs leave the ends of the bars to their names. */
const DRAWN_EDGE = 2.2;
const COUNTED = 4000;
const EDGE = 2.8;
const BINS = 56;
const WIDTH = 800;
const BAR = { signal: 150, idler: 410 };
const TALL = 96;

const pairs = simulatePairs(COUNTED, 0.16, 17);
const shown = pairs
  .filter((p) => Math.abs(p.signal) < DRAWN_EDGE && Math.abs(p.idler) < DRAWN_EDGE)
  .slice(0, SHOWN);
const x = (at: number): number => (WIDTH / 2) * (1 + at / EDGE);

/** Steps of a histogram standing on a bar (up is -1) or hanging from it (1). */
function stepsPath(values: readonly number[], base: number, direction: 1 | -1): string {
  const counts = countInBins(values, BINS, EDGE);
  const scale = TALL / Math.max(...counts);
  const width = WIDTH / BINS;
  return counts.reduce(
    (path, count, i) =>
      `${path}V${(base + direction * count * scale).toFixed(1)}H${((i + 1) * width).toFixed(1)}`,
    `M0 ${base}`,
  );
}

/** The mark, taken at its word: two bars that share pairs. */
export function PairFigure() {
  return (
    <figure>
      <svg viewBox={`0 44 ${WIDTH} 476`} className="w-full" aria-hidden="true">
        <g stroke="var(--color-pair)" strokeOpacity="0.2" strokeWidth="calc(var(--plot-hair) * 0.8)">
          {shown.map((pair) => (
            <line key={pair.signal} x1={x(pair.signal)} y1={BAR.signal} x2={x(pair.idler)} y2={BAR.idler} />
          ))}
        </g>
        <path
          d={stepsPath(
            pairs.map((pair) => pair.signal),
            BAR.signal,
            -1,
          )}
          fill="none"
          stroke="var(--color-signal)"
          strokeWidth="var(--plot-line)"
        />
        <path
          d={stepsPath(
            pairs.map((pair) => pair.idler),
            BAR.idler,
            1,
          )}
          fill="none"
          stroke="var(--color-idler)"
          strokeWidth="var(--plot-line)"
        />
        <rect x="0" y={BAR.signal - 1.5} width={WIDTH} height="3" fill="var(--color-signal)" />
        <rect x="0" y={BAR.idler - 1.5} width={WIDTH} height="3" fill="var(--color-idler)" />
        <g fontFamily="var(--font-mono)" fontSize="13">
          <text x="0" y={BAR.signal + 20} fill="var(--color-signal)">
            signal
          </text>
          <text x="0" y={BAR.idler - 11} fill="var(--color-idler)">
            idler
          </text>
        </g>
      </svg>
      <figcaption className="mt-2 font-mono text-xs text-dim">
        {SHOWN} of {COUNTED} simulated pairs in the far field: opposite momenta
      </figcaption>
    </figure>
  );
}
