import { scaleLinear, scaleLog } from '@visx/scale';
import { useId, useMemo } from 'react';
import { axisSpan, binCentre } from './axis-geometry';
import { BrushHandles } from './BrushHandles';
import { decades, formatAmount, formatDecade, tickFormatter } from './format-tick';
import { LineData, Residuals } from './LineData';
import { Bands, BrushArea, LineKeys, Marks } from './LineMarks';
import { computeLineRects } from './line-layout';
import { computeResiduals, valueSpan, visibleBins } from './line-paths';
import { describeBin, describeLine } from './line-text';
import { BottomAxis, Frame, LeftAxis, type PlotRect } from './PlotAxes';
import { PlotFrame } from './PlotFrame';
import { toneColour } from './tones';
import type { LinePlotProps } from './types';
import { useBox } from './use-box';
import { useLineGestures } from './use-line-gestures';

/** Residuals within this many sigma always fit the strip. */
const STRIP_SIGMAS = 3.5;

function buildValueScale(span: readonly [number, number], rect: PlotRect, log: boolean) {
  const options = { domain: [...span], range: [rect.top + rect.height, rect.top] };
  return log ? scaleLog<number>({ ...options, clamp: true }) : scaleLinear<number>(options);
}

function valueTicks(
  scale: { ticks(count: number): number[] },
  span: readonly [number, number],
  log: boolean,
  count: number,
) {
  const whole = log ? decades(span[0], span[1]) : [];
  if (whole.length >= 2) return { ticks: whole, format: formatDecade };
  const ticks = scale.ticks(count);
  const step = ticks.length > 1 ? ticks[1]! - ticks[0]! : 1;
  return { ticks, format: (value: number) => formatAmount(value, step) };
}

/** A 1-D map: data with error bars, model, residuals, window, bands and marks. See LinePlotProps. */
export function LinePlot(props: LinePlotProps) {
  const { map, brush, bands = [], tone, logY = false, showModel = false, showResiduals = false } = props;
  const id = useId();
  const [hostRef, box] = useBox<HTMLDivElement>();
  const residuals = useMemo(() => computeResiduals(map), [map]);
  const withStrip = showResiduals && residuals !== null;
  const { main, strip } = useMemo(() => computeLineRects(box, withStrip), [box, withStrip]);
  const gestures = useLineGestures(props, hostRef, main);
  const { view, cursorBin } = gestures;
  const axis = map.axes[0]!;
  const [viewLo, viewHi] = view;

  const drawn = useMemo(() => {
    const bins = visibleBins(map, [viewLo, viewHi]);
    const span = valueSpan(map, bins, logY);
    const xScale = scaleLinear<number>({
      domain: [viewLo, viewHi],
      range: [main.left, main.left + main.width],
    });
    const yScale = buildValueScale(span, main, logY);
    // A logarithm of zero or less has no place: those values lie on the foot of the axis.
    const y = (value: number): number =>
      logY && !(value > span[0]) ? main.top + main.height : yScale(value);
    return { bins, span, xScale, yScale, scales: { x: (at: number) => xScale(at), y } };
  }, [map, viewLo, viewHi, logY, main]);
  const { bins, span, xScale, yScale, scales } = drawn;
  const x = scales.x;
  const xTicks = xScale.ticks(Math.max(2, Math.min(10, Math.floor(main.width / (box.em * 7)))));
  const values = valueTicks(
    yScale,
    span,
    logY,
    Math.max(2, Math.min(6, Math.floor(main.height / (box.em * 3)))),
  );
  const binPx = (main.width * Math.abs(axis.step || 1)) / (viewHi - viewLo);
  const readout = cursorBin === null ? '' : describeBin(map, cursorBin, residuals);
  const common = { rect: main, em: box.em };
  const bottom = strip ?? main;
  return (
    <PlotFrame
      title={props.title === undefined ? map.label : props.title}
      note={props.note}
      readout={readout}
      keys={<LineKeys bands={bands} brush={brush} model={showModel && map.model !== undefined} />}
      announcement={gestures.byKeys ? readout : ''}
      height={props.height}
      hostRef={hostRef}
    >
      {box.width === 0 ? null : (
        <div
          role="application"
          aria-roledescription="plot"
          aria-label={`${map.label}: cursor`}
          // biome-ignore lint/a11y/noNoninteractiveTabindex: the arrow keys move the cursor
          tabIndex={0}
          className="group/plot absolute inset-0 touch-none outline-none"
          {...gestures.handlers}
        >
          <svg
            role="img"
            aria-label={describeLine(map)}
            width={box.width}
            height={box.height}
            fontSize={box.em}
            className="absolute inset-0 overflow-hidden"
          >
            <defs>
              <clipPath id={`${id}-main`}>
                <rect x={main.left} y={main.top} width={main.width} height={main.height} />
              </clipPath>
              <clipPath id={`${id}-bottom`}>
                <rect x={bottom.left} y={bottom.top} width={bottom.width} height={bottom.height} />
              </clipPath>
            </defs>
            <g clipPath={`url(#${id}-main)`}>
              <Bands bands={bands} x={x} rect={main} />
              {brush ? <BrushArea brush={brush} x={x} rect={main} /> : null}
              {span[0] < 0 && !logY ? (
                <path d={`M${main.left} ${scales.y(0)}h${main.width}`} stroke="var(--color-strong)" />
              ) : null}
              <LineData
                map={map}
                bins={bins}
                scales={scales}
                style={props.style}
                colour={toneColour(tone)}
                showModel={showModel}
                binPx={binPx}
              />
              <Marks marks={props.marks} x={x} view={view} {...common} />
              {cursorBin === null ? null : (
                <path
                  d={`M${x(binCentre(axis, cursorBin))} ${main.top}v${main.height}`}
                  stroke="var(--color-text)"
                  strokeDasharray="2 3"
                  data-cursor=""
                />
              )}
            </g>
            {strip === null || residuals === null ? null : (
              <g clipPath={`url(#${id}-bottom)`}>
                <ResidualStrip map={map} bins={bins} values={residuals} x={x} rect={strip} />
              </g>
            )}
            <Frame rect={main} />
            {strip === null ? null : (
              <>
                <Frame rect={strip} />
                <text
                  x={strip.left - box.em * 0.7}
                  y={strip.top + strip.height / 2 + box.em * 0.34}
                  textAnchor="end"
                  fill="var(--color-dim)"
                >
                  res. / σ
                </text>
              </>
            )}
            <BottomAxis
              scale={xScale}
              ticks={xTicks}
              format={tickFormatter(xTicks)}
              rect={bottom}
              em={box.em}
              axis={axis}
            />
            <LeftAxis
              scale={yScale}
              ticks={values.ticks}
              format={values.format}
              {...common}
              axis={{ label: map.unit === '1' ? 'value' : map.unit, unit: '1' }}
            />
          </svg>
          {brush ? (
            <BrushHandles
              brush={brush}
              axis={axis}
              full={axisSpan(axis, map.shape[0] ?? 0)}
              view={view}
              rect={main}
              toAxis={(event) => gestures.toAxis(gestures.locate(event).px)}
            />
          ) : null}
        </div>
      )}
    </PlotFrame>
  );
}

interface StripProps {
  map: LinePlotProps['map'];
  bins: { from: number; to: number };
  values: Float64Array;
  x(at: number): number;
  rect: PlotRect;
}

/** Residuals in units of their sigma; one sigma either way is shaded. */
function ResidualStrip({ map, bins, values, x, rect }: StripProps) {
  const reach = values.reduce(
    (most, r) => Math.max(most, Number.isFinite(r) ? Math.abs(r) : 0),
    STRIP_SIGMAS,
  );
  const y = (r: number): number => rect.top + (rect.height / 2) * (1 - r / (reach * 1.1));
  return (
    <>
      <rect x={rect.left} y={y(1)} width={rect.width} height={y(-1) - y(1)} fill="var(--color-shade)" />
      <path d={`M${rect.left} ${y(0)}h${rect.width}`} stroke="var(--color-strong)" />
      <Residuals map={map} bins={bins} scales={{ x, y }} values={values} />
    </>
  );
}
