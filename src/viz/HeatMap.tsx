import { scaleLinear } from '@visx/scale';
import { useId, useMemo } from 'react';
import { ColourBar } from './ColourBar';
import { buildColourScale } from './colour-scale';
import { tickFormatter } from './format-tick';
import { buildBlankPath, HATCH_PX } from './hatch';
import { MapCanvas, MapRects } from './MapImage';
import { Crosshair, DraftRegion, ELLIPSE_SIGMAS, EllipseMark, RegionBox } from './MapOverlay';
import { computeBinTransform, computeMapRect, fullView } from './map-layout';
import { computeExtremes, describeMap, describePoint, gridOf } from './map-values';
import { BottomAxis, Frame, LeftAxis } from './PlotAxes';
import { PlotFrame } from './PlotFrame';
import { getPalette } from './palettes';
import type { HeatMapProps } from './types';
import { useBox } from './use-box';
import { useMapGestures } from './use-map-gestures';
import { useMapView, useWheelZoom } from './use-map-view';

/** Largest side drawn as SVG: ten maps of more rectangles than that are a long task of the page; a canvas is none. */
const SVG_SIDE = 16;

const KEYS_HELP =
  'Arrow keys move the cursor, with Shift by ten bins. Enter picks or sets a corner. Plus and minus zoom, 0 shows all.';

/** A 2-D map with axes, colour bar, linked cursor, zoom and regions. See HeatMapProps. */
export function HeatMap(props: HeatMapProps) {
  const { map, theme, tool, regions = [], range, logScale = false } = props;
  const id = useId();
  const [hostRef, box] = useBox<HTMLDivElement>();
  const extremes = useMemo(() => computeExtremes(map), [map]);
  const full = useMemo(() => fullView(map), [map]);
  const [rangeLo, rangeHi] = range ?? [];
  const scale = useMemo(() => {
    const fixed = rangeLo === undefined || rangeHi === undefined ? undefined : ([rangeLo, rangeHi] as const);
    return buildColourScale(map.scale, extremes, fixed, logScale);
  }, [map.scale, extremes, rangeLo, rangeHi, logScale]);
  const palette = getPalette(theme, map.scale);
  const rect = useMemo(() => computeMapRect(map, full, box), [map, full, box]);
  const binSize = { x: Math.abs(map.axes[0]?.step || 1), y: Math.abs(map.axes[1]?.step || 1) };
  const control = useMapView(full, binSize);
  useWheelZoom(hostRef, rect, control);
  const gestures = useMapGestures(props, hostRef, rect, control);

  const { view } = control;
  const transform = useMemo(() => computeBinTransform(map, view, rect), [map, view, rect]);
  const { nx, ny } = gridOf(map);
  const asSvg = nx <= SVG_SIDE && ny <= SVG_SIDE;
  const blankPath = useMemo(() => (asSvg ? buildBlankPath(map, transform) : ''), [asSvg, map, transform]);
  const xScale = scaleLinear<number>({ domain: [...view.x], range: [rect.left, rect.left + rect.width] });
  const yScale = scaleLinear<number>({ domain: [...view.y], range: [rect.top + rect.height, rect.top] });
  const project = { x: (at: number) => xScale(at), y: (at: number) => yScale(at) };
  const xTicks = xScale.ticks(Math.max(2, Math.min(8, Math.floor(rect.width / (box.em * 5)))));
  const yTicks = yScale.ticks(Math.max(2, Math.min(8, Math.floor(rect.height / (box.em * 4)))));
  const { cursor } = gestures;
  const hint = tool ? `draw ${tool.label}: drag, or Enter at two corners` : '';
  const images = { map, scale, palette };
  return (
    <PlotFrame
      title={props.title === undefined ? map.label : props.title}
      note={props.note}
      readout={(cursor === null ? null : describePoint(map, cursor)) ?? hint}
      keys={<MapKeys ellipse={map.ellipse !== undefined} blank={extremes.blank > 0} />}
      announcement={gestures.announcement}
      height={props.height}
      hostRef={hostRef}
    >
      {box.width === 0 ? null : (
        <div
          role="application"
          aria-roledescription="map"
          aria-label={`${map.label}: cursor`}
          aria-describedby={`${id}-keys`}
          // biome-ignore lint/a11y/noNoninteractiveTabindex: the arrow keys move the cursor
          tabIndex={0}
          className={`group/plot absolute inset-0 touch-none outline-none ${tool ? 'cursor-crosshair' : ''}`}
          {...gestures.handlers}
        >
          {asSvg ? null : <MapCanvas {...images} blank={extremes.blank} rect={rect} transform={transform} />}
          <svg
            role="img"
            aria-label={describeMap(map, extremes)}
            width={box.width}
            height={box.height}
            fontSize={box.em}
            className="absolute inset-0 overflow-hidden"
          >
            <defs>
              <clipPath id={`${id}-clip`}>
                <rect x={rect.left} y={rect.top} width={rect.width} height={rect.height} />
              </clipPath>
              <pattern
                id={`${id}-hatch`}
                patternUnits="userSpaceOnUse"
                width={HATCH_PX}
                height={HATCH_PX}
                patternTransform="rotate(-45)"
              >
                <line y2={HATCH_PX} stroke="var(--color-faint)" strokeWidth={2} />
              </pattern>
            </defs>
            <g clipPath={`url(#${id}-clip)`}>
              {asSvg ? (
                <g transform={`matrix(${transform.sx} 0 0 ${transform.sy} ${transform.tx} ${transform.ty})`}>
                  <MapRects {...images} />
                </g>
              ) : null}
              {blankPath === '' ? null : <path d={blankPath} fill={`url(#${id}-hatch)`} data-blank="" />}
              {map.ellipse ? <EllipseMark ellipse={map.ellipse} project={project} /> : null}
              {regions.map((mark) => (
                <RegionBox key={mark.label} mark={mark} project={project} em={box.em} />
              ))}
              {gestures.draft === null ? null : <DraftRegion region={gestures.draft} project={project} />}
              {cursor === null ? null : <Crosshair at={cursor} project={project} rect={rect} />}
            </g>
            <Frame rect={rect} />
            <BottomAxis
              scale={xScale}
              ticks={xTicks}
              format={tickFormatter(xTicks)}
              rect={rect}
              em={box.em}
              axis={map.axes[0] ?? null}
            />
            <LeftAxis
              scale={yScale}
              ticks={yTicks}
              format={tickFormatter(yTicks)}
              rect={rect}
              em={box.em}
              axis={map.axes[1] ?? null}
            />
            <ColourBar scale={scale} palette={palette} rect={rect} em={box.em} unit={map.unit} />
          </svg>
          <span id={`${id}-keys`} className="sr-only">
            {KEYS_HELP}
          </span>
        </div>
      )}
    </PlotFrame>
  );
}

/** What the marks on the map mean. */
function MapKeys({ ellipse, blank }: { ellipse: boolean; blank: boolean }) {
  return (
    <span className="flex shrink-0 items-center gap-3">
      {ellipse ? (
        <span className="flex items-center gap-1">
          <svg width="16" height="9" aria-hidden="true">
            <ellipse cx="8" cy="4.5" rx="7" ry="3.5" fill="none" stroke="var(--color-pair)" />
          </svg>
          {ELLIPSE_SIGMAS} σ
        </span>
      ) : null}
      {blank ? (
        <span className="flex items-center gap-1">
          <svg width="10" height="9" aria-hidden="true">
            <path d="M0 9L9 0M-4 9L5 0M4 9L13 0" stroke="var(--color-faint)" />
          </svg>
          masked
        </span>
      ) : null}
    </span>
  );
}
