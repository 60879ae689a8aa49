import { HistogramCell } from '../../../components/output/HistogramCell';
import { useTheme } from '../../../lib/theme/theme';
import { currentDials, currentStudy } from '../model/bench-selectors';
import { useBench, useBenchPlan, useBenchState } from './bench-context';

const HEIGHT = 170;

/** The delay histogram beside the dial that moves its window: the first input's, where there are several. */
export function DialHistogram({ readOnly }: { readOnly: boolean }) {
  const { store } = useBench();
  const theme = useTheme();
  const study = useBenchPlan(currentStudy);
  const dials = useBenchPlan(currentDials);
  const output = useBenchState((state) => state.found[state.study]?.output ?? null);
  const entry = Object.entries(output?.maps ?? {}).find(([id]) => id.startsWith('delay.histogram'));
  if (entry === undefined || output === null) return null;
  const [id, map] = entry;
  return (
    <div className="mb-2">
      <HistogramCell
        cell={{ id, map, kind: 'histogram' }}
        theme={theme}
        note={null}
        specs={study?.dials ?? []}
        dials={dials}
        chosen={output.chosen}
        onTurn={readOnly ? undefined : store.getState().turn}
        turnCost={null}
        cursor={null}
        logScale
        height={HEIGHT}
      />
    </div>
  );
}
