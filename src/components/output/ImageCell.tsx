import { useState } from 'react';
import type { DialSpec } from '../../../shared/contracts/dial';
import type { RegionMark } from '../../viz/types';
import { Button } from '../ui/Button';
import { type CellProps, noteOf } from './cell-context';
import { isRegion, plotToRegion, regionToPlot } from './dial-marks';
import { StageMap, usePresentable } from './StageMap';

/** The image itself, not what it was made from, or the mean frame of a camera: regions are drawn on it. */
const IS_RESULT = /^(image(\.(raw|net))?|mean\.frame)$/;

type RegionDial = Extract<DialSpec, { type: 'region' }>;

/** An image with its regions; with dials at hand they are drawn on it. */
export function ImageCell(props: CellProps) {
  const { cell, theme, note, specs, dials, onTurn, cursor, logScale } = props;
  const { id } = cell;
  const map = usePresentable(cell.map);
  const [drawing, setDrawing] = useState<string | null>(null);
  const regionDials = specs.filter((spec): spec is RegionDial => spec.type === 'region');
  const active = regionDials.find((spec) => spec.id === drawing);
  const marks: RegionMark[] = regionDials.flatMap((spec, i) => {
    const value = dials[spec.id];
    if (!isRegion(value)) return [];
    const tone = i === 0 ? 'signal' : 'idler';
    return [{ label: spec.label, region: regionToPlot(value, map), tone }];
  });
  return (
    <div data-map={id} className="flex flex-col gap-2">
      <StageMap
        map={map}
        theme={theme}
        note={noteOf(cell, note)}
        logScale={logScale}
        crosshair={cursor?.pointFor(map) ?? null}
        onCrosshair={(point) => cursor?.move(map, point)}
        regions={marks}
        tool={
          active === undefined || onTurn === undefined
            ? null
            : {
                label: active.label.toLowerCase(),
                onRegion: (region) => {
                  onTurn({ [active.id]: plotToRegion(region, map) });
                  setDrawing(null);
                },
              }
        }
      />
      {onTurn === undefined || regionDials.length === 0 || !IS_RESULT.test(id) ? null : (
        <div className="flex flex-wrap gap-2">
          {regionDials.map((spec) => (
            <Button
              key={spec.id}
              size="sm"
              aria-pressed={drawing === spec.id}
              className="aria-pressed:bg-shade"
              onClick={() => setDrawing(drawing === spec.id ? null : spec.id)}
            >
              {drawing === spec.id ? 'Drawing' : 'Draw'} {spec.label.toLowerCase()}
            </Button>
          ))}
        </div>
      )}
    </div>
  );
}
