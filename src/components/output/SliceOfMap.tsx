import { X } from 'lucide-react';
import { useMemo, useState } from 'react';
import type { MapData } from '../../../shared/contracts/output';
import { displayUnit, formatWithSigma } from '../../lib/format-number';
import { formatPosition } from '../../viz/format-tick';
import { LinePlot } from '../../viz/LinePlot';
import { Button } from '../ui/Button';
import { IconButton } from '../ui/IconButton';
import { HEIGHTS } from './cell-context';
import { type ConditionalSlice, computeSlice, type Estimate } from './conditional-slice';

interface SliceOfMapProps {
  map: MapData;
  ix: number;
  iy: number;
  onClose(): void;
}

function estimateWords(name: string, estimate: Estimate | null, unit: string): string {
  if (estimate === null) return `${name} not defined here`;
  return `${name} ${formatWithSigma(estimate.value, estimate.sigma)} ${displayUnit(unit)}`;
}

function sumWords({ total, totalSigma }: ConditionalSlice, unit: string): string {
  // An unknown error is no error of zero: two digits and a question mark.
  return `sum ${formatWithSigma(total, totalSigma ?? Number.POSITIVE_INFINITY)} ${displayUnit(unit)}`;
}

/** The conditional distribution through a clicked bin: where the partner is, given where this photon is. */
export function SliceOfMap({ map, ix, iy, onClose }: SliceOfMapProps) {
  const [given, setGiven] = useState<'x' | 'y'>('x');
  const slice = useMemo(() => computeSlice(map, given, ix, iy), [map, given, ix, iy]);
  const { axis, at } = slice.given;
  const where = `${axis.label} = ${formatPosition(at, axis.step / 10)} ${displayUnit(axis.unit)}`;
  const unit = slice.map.axes[0]!.unit;
  const other = map.axes[given === 'x' ? 1 : 0]!.label;
  return (
    <section aria-label="Conditional slice" className="border-t border-line pt-2">
      <div className="flex items-start justify-between gap-3">
        <div className="flex items-center gap-2">
          <Button size="sm" onClick={() => setGiven(given === 'x' ? 'y' : 'x')}>
            Given {other} instead
          </Button>
        </div>
        <IconButton label="Close the slice" onClick={onClose}>
          <X size={14} aria-hidden="true" />
        </IconButton>
      </div>
      {!slice.carries ? (
        <p className="py-2 text-sm text-dim">
          {sumWords(slice, map.unit)} at {where}: too little against its noise to normalise. Click nearer to
          the ridge.
        </p>
      ) : (
        <>
          <LinePlot
            map={{ ...slice.map, label: `${slice.map.axes[0]!.label}, given ${where}` }}
            height={HEIGHTS.line}
            style="points"
            tone={slice.map.axes[0]!.arm ?? 'pair'}
            note={map.unit === 'pairs' ? 'probability' : 'share of the slice'}
          />
          <p className="font-mono text-xs text-dim" data-slice="">
            {slice.mean === null
              ? `${sumWords(slice, map.unit)} · this map carries no errors, so no width is given`
              : [
                  estimateWords('mean', slice.mean, unit),
                  estimateWords('σ', slice.width, unit),
                  sumWords(slice, map.unit),
                  'moments of the whole slice',
                ].join(' · ')}
          </p>
        </>
      )}
    </section>
  );
}
