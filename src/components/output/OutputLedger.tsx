import type { ReactNode } from 'react';
import type { StudyOutput } from '../../../shared/contracts/output';
import { CheckList } from './CheckList';
import { LedgerSection } from './LedgerSection';
import { type Provenance, ProvenanceText } from './ProvenanceText';
import { QuantityTable } from './QuantityTable';
import { StatementText } from './StatementText';
import { VerdictList } from './VerdictList';

export interface OutputLedgerProps {
  output: StudyOutput;
  /** Of a finished run or a stored result. */
  provenance?: Provenance | null;
  /** Said beside the heading, e.g. "41 % read". */
  note?: string | null;
  /** More at the foot of the last column, e.g. the job log. */
  children?: ReactNode;
}

/** Everything a study found that is read: quantities, verdicts, checks, the statement and where it came from. */
export function OutputLedger({ output, provenance = null, note = null, children }: OutputLedgerProps) {
  const verdicts = Object.keys(output.verdicts).length;
  return (
    <div className="@container">
      <div className="grid grid-cols-1 gap-x-8 gap-y-5 @3xl:grid-cols-[minmax(0,1.35fr)_minmax(0,1fr)] @6xl:grid-cols-[minmax(0,1.5fr)_minmax(0,1fr)_minmax(0,1fr)]">
        <LedgerSection title="Quantities" note={note}>
          <QuantityTable quantities={output.quantities} verdicts={output.verdicts} />
        </LedgerSection>
        <div className="flex min-w-0 flex-col gap-5">
          <LedgerSection title="Checks" note={checksNote(output)}>
            <CheckList checks={output.checks} />
          </LedgerSection>
          {verdicts > 0 ? (
            <LedgerSection title="Verdicts">
              <VerdictList verdicts={output.verdicts} />
            </LedgerSection>
          ) : null}
        </div>
        <div className="flex min-w-0 flex-col gap-5 @3xl:max-@6xl:col-span-2">
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
          {children}
        </div>
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
