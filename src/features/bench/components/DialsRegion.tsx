import { Redo2, Undo2 } from 'lucide-react';
import type { DialSpec } from '../../../../shared/contracts/dial';
import { Button } from '../../../components/ui/Button';
import { IconButton } from '../../../components/ui/IconButton';
import {
  baseDials,
  concernedDials,
  currentDials,
  currentHistory,
  currentStudy,
  isReadingChanged,
} from '../model/bench-selectors';
import { changedDials } from '../model/dial-history';
import { pairsWords } from '../model/run-words';
import { useBench, useBenchPlan, useBenchState } from './bench-context';
import { type ChosenValue, DialControl } from './DialControl';
import { DialHistogram } from './DialHistogram';
import { Region } from './Region';
import { type TurnCost, useTurnCost } from './use-turn-cost';

export interface DialsRegionProps {
  readOnly: boolean;
}

interface DialGroup {
  id: string;
  title: string;
  /** What turning one of them costs. */
  note: string | null;
  dials: readonly DialSpec[];
}

/** Grouped by what turning them costs now: where the pairs are at hand, those that need pairs cost nothing. */
function groupDials(dials: readonly DialSpec[], { pairs, reading }: TurnCost): DialGroup[] {
  const isKept = pairs !== null && pairs.kept !== null;
  const needing = (...needs: readonly DialSpec['needs'][]): DialSpec[] =>
    orderDials(dials.filter((spec) => needs.includes(spec.needs)));
  const cost = reading === null ? null : `reads ${reading}`;
  const why = pairs !== null && pairs.kept === null ? pairs.why : null;
  const groups: DialGroup[] = isKept
    ? [
        { id: 'pairs', title: 'answered while they turn', note: pairsWords(pairs), dials: needing('pairs') },
        { id: 'bytes', title: 'counted again when turned', note: cost, dials: needing('bytes') },
      ]
    : [
        {
          id: 'bytes',
          title: 'counted again when turned',
          note: [cost, why].filter((part) => part !== null).join('. '),
          dials: needing('pairs', 'bytes'),
        },
      ];
  groups.push({ id: 'finish', title: 'answered at once', note: null, dials: needing('finish') });
  return groups.filter((group) => group.dials.length > 0);
}

/** The parameters of the study, grouped by what turning them costs. */
export function DialsRegion({ readOnly }: DialsRegionProps) {
  const { store } = useBench();
  const study = useBenchPlan(currentStudy);
  const values = useBenchPlan(currentDials);
  const history = useBenchPlan(currentHistory);
  const base = useBenchPlan(baseDials);
  const concerned = useBenchPlan(concernedDials);
  const isReadOtherwise = useBenchPlan(isReadingChanged);
  const preset = useBenchState((state) => (state.preset?.study === state.study ? state.preset : null));
  const chosen = useBenchState((state) => state.found[state.study]?.output.chosen);
  const cost = useTurnCost();
  if (study === null) return <Region title="dials">{null}</Region>;
  const changed = changedDials(study.dials, values, base);
  const { turn, undo, redo, resetDials } = store.getState();
  const presetWords =
    preset === null ? '' : `${preset.name}${preset.version === null ? '' : ` v${preset.version}`}`;
  const note = [
    // First what differs: the name of the preset may be cut off.
    changed.size > 0 ? `${changed.size} changed` : '',
    isReadOtherwise ? 'reading changed' : '',
    presetWords,
  ]
    .filter(Boolean)
    .join(' · ');
  return (
    <Region
      title="dials"
      note={note}
      actions={
        readOnly ? undefined : (
          <span className="-mr-2 flex">
            <IconButton label="Undo" shortcut="Ctrl Z" disabled={history.past.length === 0} onClick={undo}>
              <Undo2 size={14} aria-hidden="true" />
            </IconButton>
            <IconButton
              label="Redo"
              shortcut="Ctrl Shift Z"
              disabled={history.future.length === 0}
              onClick={redo}
            >
              <Redo2 size={14} aria-hidden="true" />
            </IconButton>
          </span>
        )
      }
    >
      {readOnly ? (
        <p className="mb-3 text-xs text-dim">
          As a runner you run presets as they are: the inputs can be chosen, the dials stand.
        </p>
      ) : null}
      {groupDials(concerned, cost).map(({ id, title, note: costNote, dials }) => {
        return (
          <div key={id} className="mb-5" data-dials={id}>
            <h3 className="font-mono text-xs text-dim">{title}</h3>
            {costNote ? <p className="font-mono text-xs wrap-anywhere text-faint">{costNote}</p> : null}
            <div className="mt-1 flex flex-col divide-y divide-line border-t border-line">
              {dials.map((spec) => (
                <div key={spec.id} className="py-2">
                  {spec.id === 'window' && study.id !== 'delay' ? (
                    <DialHistogram readOnly={readOnly} />
                  ) : null}
                  <DialControl
                    spec={spec}
                    value={values[spec.id] ?? null}
                    chosen={chosenFor(spec.id, chosen ?? {})}
                    changed={changed.has(spec.id)}
                    readOnly={readOnly}
                    onTurn={(value) => turn({ [spec.id]: value })}
                  />
                </div>
              ))}
            </div>
          </div>
        );
      })}
      {readOnly || changed.size === 0 ? null : (
        <Button size="sm" onClick={resetDials}>
          {preset === null ? 'Reset to defaults' : `Reset to ${presetWords}`}
        </Button>
      )}
    </Region>
  );
}

/** What the study chose for a dial: one value, or one for each acquisition ("window.near", "window.far"). */
function chosenFor(id: string, chosen: Record<string, number>): ChosenValue[] {
  const own = chosen[id];
  if (own !== undefined) return [{ part: '', value: own }];
  return Object.entries(chosen).flatMap(([key, value]) => {
    const part = key.startsWith(`${id}.`) ? key.slice(id.length + 1) : '';
    return part === '' || part.includes('.') ? [] : [{ part, value }];
  });
}

/** The two one turns most come first. */
function orderDials(dials: readonly DialSpec[]): DialSpec[] {
  const rank = ({ id }: DialSpec): number => (id === 'window' ? 0 : id === 'delay' ? 1 : 2);
  return [...dials].sort((a, b) => rank(a) - rank(b));
}
