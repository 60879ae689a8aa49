import { memo, type ReactNode, useMemo, useState } from 'react';
import type { DialSpec, DialValues } from '../../../shared/contracts/dial';
import type { Check, StudyOutput } from '../../../shared/contracts/output';
import type { Theme } from '../../viz/types';
import { CheckMark } from '../ui/CheckMark';
import { Toggle } from '../ui/Toggle';
import { arrangeMaps, hasVariants, type Section } from './arrange-maps';
import { MapCell } from './MapCell';
import { VARIANT_WORDS, type Variant } from './quantity-words';
import { useLinkedCursor } from './use-linked-cursor';
import { type JudgedRow, judgedRows, VerdictRulers } from './VerdictRulers';

export interface OutputStageProps {
  output: StudyOutput;
  theme: Theme;
  /** Said beside every map, e.g. "41 % read" or "from earlier dials". */
  note?: string | null;
  /** With these, the window and the regions can be moved on the plots. */
  specs?: readonly DialSpec[];
  dials?: DialValues;
  onTurn?(values: DialValues): void;
  /** What moving the window costs, in words; left out where it costs nothing. */
  turnCost?: string | null;
  /** Left in the line above the plots: the study, the progress. */
  children?: ReactNode;
}

const NO_SPECS: readonly DialSpec[] = [];
const NO_DIALS: DialValues = {};

/** Everything a study found that is drawn: verdicts on their rulers over the maps they rest on, then the rest. */
export const OutputStage = memo(function OutputStage(props: OutputStageProps) {
  const {
    output,
    theme,
    note = null,
    specs = NO_SPECS,
    dials = NO_DIALS,
    onTurn,
    turnCost = null,
    children,
  } = props;
  const [variant, setVariant] = useState<Variant>('net');
  const [logScale, setLogScale] = useState(false);
  const cursor = useLinkedCursor();
  const sections = useMemo(
    () => arrangeMaps(output.study, output.maps, variant),
    [output.study, output.maps, variant],
  );
  const blocks = useMemo(
    () => interleave(sections, judgedRows(output.verdicts, output.quantities)),
    [sections, output.verdicts, output.quantities],
  );
  const shared = { theme, note, specs, dials, onTurn, turnCost, cursor, logScale, chosen: output.chosen };
  return (
    <div className="flex flex-col gap-5">
      <div className="flex flex-wrap items-start justify-between gap-x-5 gap-y-1">
        <div className="min-w-[min(100%,16rem)] flex-1">{children}</div>
        <div className="flex flex-wrap items-center gap-x-5">
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
      <FailedChecks checks={output.checks} />
      {blocks.map((block) =>
        block.kind === 'rulers' ? (
          <VerdictRulers key={block.id} rows={block.rows} />
        ) : (
          <div
            key={block.section.id}
            className={`grid gap-x-6 gap-y-5 ${columnsOf(block.section)}`}
            data-section={block.section.id}
          >
            {block.section.cells.map((cell) => (
              <MapCell key={cell.id} cell={cell} {...shared} />
            ))}
          </div>
        ),
      )}
      {sections.length === 0 ? <p className="text-dim">This study drew no maps.</p> : null}
    </div>
  );
});

/** What failed stands over the pictures too: no verdict is read without it. */
function FailedChecks({ checks }: { checks: readonly Check[] }) {
  const failed = checks.filter(({ status }) => status === 'fail');
  if (failed.length === 0) return null;
  return (
    <ul className="flex flex-col gap-1" aria-label="Failed checks">
      {failed.map(({ id, sentence }) => (
        <li key={id} className="flex items-baseline gap-2 text-sm">
          <CheckMark status="fail" />
          {sentence}
        </li>
      ))}
    </ul>
  );
}

type Block = { kind: 'rulers'; id: string; rows: JudgedRow[] } | { kind: 'maps'; section: Section };

/** The verdicts on an axis stand over the maps of that axis; those on both axes follow them. */
function interleave(sections: readonly Section[], rows: readonly JudgedRow[]): Block[] {
  const blocks: Block[] = [];
  const left = new Set(rows);
  let end = 0;
  for (const section of sections) {
    const [, part, axis] = /^(joint|width)-(.)$/.exec(section.id) ?? [];
    const own = part === 'joint' ? [...left].filter(({ base }) => base.endsWith(`.${axis}`)) : [];
    for (const row of own) left.delete(row);
    if (own.length > 0) blocks.push({ kind: 'rulers', id: `rulers-${axis}`, rows: own });
    blocks.push({ kind: 'maps', section });
    if (part !== undefined) end = blocks.length;
  }
  if (left.size > 0) blocks.splice(end, 0, { kind: 'rulers', id: 'rulers', rows: [...left] });
  return blocks;
}

function columnsOf({ wide, cells }: Section): string {
  if (wide || cells.length === 1) return 'grid-cols-1';
  return cells.length % 3 === 0
    ? 'grid-cols-[repeat(auto-fit,minmax(min(100%,17rem),1fr))]'
    : 'grid-cols-[repeat(auto-fit,minmax(min(100%,21rem),1fr))]';
}
