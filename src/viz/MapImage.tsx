import { HeatmapRect } from '@visx/heatmap';
import { memo, useEffect, useMemo, useRef, useState } from 'react';
import type { MapData } from '../../shared/contracts/output';
import { type ColourScale, paletteIndex } from './colour-scale';
import { runInSteps } from './in-steps';
import type { BinTransform } from './map-layout';
import { gridOf, isBlank } from './map-values';
import type { PlotRect } from './PlotAxes';
import type { Palette } from './palettes';
import { drawRaster, paintRaster, type Raster } from './raster';

interface RectsProps {
  map: MapData;
  scale: ColourScale;
  palette: Palette;
}

interface Column {
  bins: { colour: number | null }[];
}

function buildColumns(map: MapData, scale: ColourScale): Column[] {
  const { nx, ny } = gridOf(map);
  return Array.from({ length: nx }, (_, ix) => ({
    bins: Array.from({ length: ny }, (_, iy) => {
      const index = iy * nx + ix;
      return { colour: isBlank(map, index) ? null : paletteIndex(scale, map.data[index]!) };
    }),
  }));
}

/** Small maps, one rectangle a bin in bin units: zoom and pan move the group, the rectangles are not made again. */
export const MapRects = memo(function MapRects({ map, scale, palette }: RectsProps) {
  const columns = useMemo(() => buildColumns(map, scale), [map, scale]);
  return (
    <HeatmapRect
      data={columns}
      bins={(column: Column) => column.bins}
      count={(bin) => bin.colour ?? -1}
      xScale={(ix) => ix}
      yScale={(iy) => iy}
      binWidth={1}
      binHeight={1}
      gap={0}
      colorScale={(place) => palette.css[Number(place)] ?? 'none'}
      shapeRendering="crispEdges"
    />
  );
});

const NOTHING: Raster = { image: null, blank: null };

/** The map painted, in short tasks; what was painted before stays until it is. */
function useRaster(map: MapData, scale: ColourScale, palette: Palette, blank: number): Raster {
  const [raster, setRaster] = useState(NOTHING);
  useEffect(() => {
    let painted = NOTHING;
    const steps = paintRaster(map, scale, palette, blank, (done) => {
      painted = done;
    });
    return runInSteps(steps, () => setRaster(painted));
  }, [map, scale, palette, blank]);
  return raster;
}

interface CanvasProps extends RectsProps {
  blank: number;
  rect: PlotRect;
  transform: BinTransform;
}

/** Large maps: a look-up table of 32-bit pixels, painted once, placed at every zoom. */
export function MapCanvas({ map, scale, palette, blank, rect, transform }: CanvasProps) {
  const ref = useRef<HTMLCanvasElement>(null);
  const { image, blank: blankImage } = useRaster(map, scale, palette, blank);
  useEffect(() => {
    const canvas = ref.current;
    const context = canvas?.getContext('2d');
    if (!canvas || !context || image === null) return;
    const frame = requestAnimationFrame(() => {
      const ratio = window.devicePixelRatio || 1;
      canvas.width = Math.round(rect.width * ratio);
      canvas.height = Math.round(rect.height * ratio);
      const hatchColour = getComputedStyle(canvas).getPropertyValue('--color-faint').trim();
      drawRaster(context, image, blankImage, { rect, transform, ratio, hatchColour });
    });
    return () => cancelAnimationFrame(frame);
  }, [image, blankImage, rect, transform]);
  return (
    <canvas
      ref={ref}
      className="absolute"
      style={{
        left: rect.left,
        top: rect.top,
        width: rect.width,
        height: rect.height,
        imageRendering: 'pixelated',
      }}
    />
  );
}
