import type { ResultRow } from '../../../../shared/contracts/http';
import type { StudyOutput } from '../../../../shared/contracts/output';
import { OutputLedger } from '../../../components/output/OutputLedger';
import { OutputStage } from '../../../components/output/OutputStage';
import { ProblemNote } from '../../../components/page/ProblemNote';
import { useTheme } from '../../../lib/theme/theme';

export interface ResultBodyProps {
  row: ResultRow;
  /** With the maps that are here. */
  output: StudyOutput;
  /** Maps still on their way. */
  waiting: number;
  errors: readonly Error[];
}

/** Two maps side by side in either text size. */
const COLUMNS = {
  bench: 'xl:grid-cols-[minmax(0,11fr)_minmax(0,9fr)]',
  projector: 'xl:grid-cols-[minmax(0,7fr)_minmax(0,5fr)]',
};

/** What the bench showed when the result was saved: plots beside numbers, nothing to turn. */
export function ResultBody({ row, output, waiting, errors }: ResultBodyProps) {
  const theme = useTheme();
  const { provenance } = row.result;
  const total = Object.keys(row.result.maps).length;
  return (
    <div className={`grid ${COLUMNS[theme]}`}>
      <section aria-label="Plots" className="min-w-0 px-5 py-3 xl:min-h-[calc(100dvh-6rem)] xl:border-r">
        <h2 className="sr-only">Plots</h2>
        {errors.map((error) => (
          <ProblemNote key={error.message} error={error} />
        ))}
        {waiting > 0 ? (
          <p role="status" className="py-1 font-mono text-xs text-dim">
            fetching maps, {total - waiting} of {total} …
          </p>
        ) : (
          <OutputStage output={output} theme={theme} dials={provenance.dials} />
        )}
      </section>
      <section aria-label="Numbers" className="min-w-0 px-5 py-3 max-xl:border-t">
        <h2 className="sr-only">Numbers</h2>
        <OutputLedger output={output} provenance={provenance} />
      </section>
    </div>
  );
}
