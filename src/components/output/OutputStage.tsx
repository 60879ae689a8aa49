import { type ReactNode, useMemo, useState } from 'react';
import type { DialSpec, DialValues } from '../../../shared/contracts/dial';
import type { StudyOutput } from '../../../shared/contracts/output';
import type { Theme } from '../../viz/types';
import { Toggle } from '../ui/Toggle';
import { arrangeMaps, hasVariants, type Section } from './arrange-maps';
import { MapCell } from './MapCell';
import { VARIANT_WORDS, type Variant } from './quantity-words';
import { useLinkedCursor } from './use-linked-cursor';
import { VerdictRulers } from './VerdictRulers';

export interface OutputStageProps {
  output: StudyOutput;
  theme: Theme;
  /** Said beside every map, e.g. "41 % read" or "from earlier dials". */
  note?: string | null;
  /** With these, the window and the regions can be moved on the plots. */
  specs?: readonly DialSpec[];
  dials?: DialValues;
  onTurn?(values: DialValues): void;
  /** Left in the line above the plots: the study, the progress. */
  children?: ReactNode;
}

/** Everything a study found that is drawn: bounds first, then the maps in the order one reads them. */
export function OutputStage(props: OutputStageProps) {
  const { output, theme, note = null, specs = [], dials = {}, onTurn, children } = props;
  const [variant, setVariant] = useState<Variant>('net');
  const [logScale, setLogScale] = useState(false);
  const cursor = useLinkedCursor();
  const sections = useMemo(
    () => arrangeMaps(output.study, output.maps, variant),
    [output.study, output.maps, variant],
  );
  const shared = { theme, note, specs, dials, onTurn, cursor, logScale, chosen: output.chosen };
  return (
    <div className="flex flex-col gap-5">
      <div className="flex flex-wrap items-center justify-between gap-x-5 gap-y-2">
        <div className="min-w-0">{children}</div>
        <div className="flex items-center gap-5">
          {hasVariants(output.maps) ? (
            <Toggle
              label={`Maps with ${VARIANT_WORDS.net}`}
              checked={variant === 'net'}
              onChange={(on) => setVariant(on ? 'net' : 'raw')}
            />
          ) : null}
          <Toggle label="Log scale" checked={logScale} onChange={setLogScale} />
        </div>
      </div>
      <VerdictRulers verdicts={output.verdicts} quantities={output.quantities} />
      {sections.map((section) => (
        <div
          key={section.id}
          className={`grid gap-x-6 gap-y-5 ${columnsOf(section)}`}
          data-section={section.id}
        >
          {section.cells.map((cell) => (
            <MapCell key={cell.id} cell={cell} {...shared} />
          ))}
        </div>
      ))}
      {sections.length === 0 ? <p className="text-dim">This study drew no maps.</p> : null}
    </div>
  );
}

function columnsOf({ wide, cells }: Section): string {
  if (wide || cells.length === 1) return 'grid-cols-1';
  return cells.length % 3 === 0
    ? 'grid-cols-[repeat(auto-fit,minmax(min(100%,17rem),1fr))]'
    : 'grid-cols-[repeat(auto-fit,minmax(min(100%,21rem),1fr))]';
}
