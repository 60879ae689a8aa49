import type { StudyInfo } from '../../../../shared/contracts/study';
import { Button } from '../../../components/ui/Button';
import type { Need } from '../model/study-inputs';

export interface EmptyStageProps {
  study: StudyInfo;
  needs: readonly Need[];
  /** null where the reading may not be changed. */
  onEdit: ((acquisitionId: string) => void) | null;
  onOpen(): void;
}

/** What the study answers and what it still needs, each with the way to settle it. */
export function EmptyStage({ study, needs, onEdit, onOpen }: EmptyStageProps) {
  const lacksFiles = needs.some((need) => need.acquisitionId === null);
  return (
    <div className="mb-6 max-w-prose py-3" data-testid="stage-needs">
      <p className="text-lg">{study.answers}</p>
      <p className="mt-4 font-mono text-xs text-dim">still needed</p>
      <ul className="mt-1 flex flex-col divide-y divide-line border-y border-line">
        {needs.map(({ sentence, acquisitionId }) => (
          <li key={sentence} className="flex min-h-10 items-center justify-between gap-4 py-1">
            <span>{sentence}</span>
            {acquisitionId === null || onEdit === null ? null : (
              <Button size="sm" onClick={() => onEdit(acquisitionId)}>
                Open its reading
              </Button>
            )}
          </li>
        ))}
      </ul>
      {lacksFiles ? (
        <p className="mt-4 flex items-center gap-3 text-dim">
          <Button variant="primary" onClick={onOpen}>
            Open files
          </Button>
          or drop them anywhere: HDF5, NumPy, TIFF, text or binary records. The bytes stay on this machine.
        </p>
      ) : null}
    </div>
  );
}
