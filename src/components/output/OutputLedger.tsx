import type { RunResult } from '../../../shared/contracts/engine';
import type { StudyOutput } from '../../../shared/contracts/output';
import type { ResultFile } from '../../../shared/contracts/result';
import { CheckList } from './CheckList';
import { LedgerSection } from './LedgerSection';
import { ProvenanceText } from './ProvenanceText';
import { QuantityTable } from './QuantityTable';
import { StatementText } from './StatementText';
import { VerdictList } from './VerdictList';

export interface OutputLedgerProps {
  output: StudyOutput;
  /** Of a finished run or a stored result. */
  provenance?: RunResult['provenance'] | ResultFile['provenance'] | null;
  /** Said beside the heading, e.g. "41 % read". */
  note?: string | null;
}

/** Everything a study found that is read: quantities, verdicts, checks, the statement and where it came from. */
export function OutputLedger({ output, provenance = null, note = null }: OutputLedgerProps) {
  const verdicts = Object.keys(output.verdicts).length;
  return (
    <div className="grid grid-cols-[repeat(auto-fit,minmax(min(100%,26rem),1fr))] gap-x-8 gap-y-5">
      <LedgerSection title="Quantities" note={note}>
        <QuantityTable quantities={output.quantities} verdicts={output.verdicts} />
      </LedgerSection>
      <div className="flex min-w-0 flex-col gap-5">
        {verdicts > 0 ? (
          <LedgerSection title="Verdicts">
            <VerdictList verdicts={output.verdicts} />
          </LedgerSection>
        ) : null}
        <LedgerSection title="Checks" note={checksNote(output)}>
          <CheckList checks={output.checks} />
        </LedgerSection>
        {output.statement === '' ? null : (
          <LedgerSection title="Statement">
            <StatementText text={output.statement} />
          </LedgerSection>
        )}
        {provenance === null ? null : (
          <LedgerSection title="Provenance">
            <ProvenanceText provenance={provenance} />
          </LedgerSection>
        )}
      </div>
    </div>
  );
}

function checksNote({ checks }: StudyOutput): string {
  const parts = (['pass', 'caution', 'fail'] as const).flatMap((status) => {
    const count = checks.filter((check) => check.status === status).length;
    return count === 0 ? [] : [`${count} ${status}`];
  });
  return parts.join(' · ');
}
