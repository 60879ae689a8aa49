import type { ResultRow } from '../../../../shared/contracts/http';
import { ProblemNote } from '../../../components/page/ProblemNote';
import { Button } from '../../../components/ui/Button';
import { Dialog } from '../../../components/ui/Dialog';
import { useOwnGroup } from '../../../lib/query/me';
import { useDeleteResult } from '../api/delete-result';

export interface DeleteResultProps {
  row: ResultRow;
  open: boolean;
  onClose(): void;
  onDone(): void;
}

export function DeleteResult({ row, open, onClose, onDone }: DeleteResultProps) {
  const group = useOwnGroup();
  const removal = useDeleteResult(group.id, row.id, onDone);
  return (
    <Dialog
      open={open}
      onOpenChange={(next) => {
        if (next) return;
        removal.reset();
        onClose();
      }}
      title="Delete this result?"
      size="sm"
      footer={
        <>
          <Button onClick={onClose}>Keep it</Button>
          <Button variant="danger" disabled={removal.isPending} onClick={() => removal.mutate()}>
            {removal.isPending ? 'Deleting …' : 'Delete for everyone'}
          </Button>
        </>
      }
    >
      <p>
        “{row.name}” goes for the whole group, with its maps. It cannot be brought back; with the raw files
        and its preset the study can be run again. Download it first if in doubt.
      </p>
      {removal.error === null ? null : <ProblemNote error={removal.error} />}
    </Dialog>
  );
}
