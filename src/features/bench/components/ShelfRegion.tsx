import { FolderOpen } from 'lucide-react';
import { Button } from '../../../components/ui/Button';
import { Field } from '../../../components/ui/Field';
import { Kbd } from '../../../components/ui/Kbd';
import { Menu } from '../../../components/ui/Menu';
import { Select } from '../../../components/ui/Select';
import type { Acquisition } from '../model/acquisition';
import { currentAssignment, currentStudy } from '../model/bench-selectors';
import { fits } from '../model/study-inputs';
import { AcquisitionCard } from './AcquisitionCard';
import { useBench, useBenchPlan, useBenchState } from './bench-context';
import { Region } from './Region';
import { SequenceOffers } from './SequenceOffers';

export interface ShelfRegionProps {
  readOnly: boolean;
  samples: readonly { label: string; open(): void }[];
  onOpen(): void;
  onEdit(acquisitionId: string): void;
  /** Opens the dialog of an acquisition's second clock. */
  onClock(acquisitionId: string): void;
}

/** What is loaded, and which acquisition serves which input of the study. */
export function ShelfRegion({ readOnly, samples, onOpen, onEdit, onClock }: ShelfRegionProps) {
  const shelf = useBenchState((state) => state.shelf);
  const assignment = useBenchPlan(currentAssignment);
  const { store } = useBench();
  const inputOf = (id: string): string | null =>
    Object.entries(assignment).find(([, held]) => held === id)?.[0] ?? null;
  return (
    <Region
      title="shelf"
      note={shelf.length === 0 ? undefined : String(shelf.length)}
      actions={
        <Button size="sm" onClick={onOpen} aria-keyshortcuts="Control+O">
          <FolderOpen size={13} aria-hidden="true" />
          Open files
        </Button>
      }
    >
      <Inputs shelf={shelf} />
      {readOnly ? null : <SequenceOffers />}
      {shelf.length === 0 ? (
        <p className="text-sm text-dim">
          Nothing on the shelf. Drop files anywhere on the bench, or press <Kbd>Ctrl O</Kbd>: HDF5, NumPy,
          TIFF, text and fixed-width binary records, told apart by their bytes.
        </p>
      ) : (
        <ul className="flex flex-col divide-y divide-line border-y border-line">
          {shelf.map((acquisition) => (
            <AcquisitionCard
              key={acquisition.id}
              acquisition={acquisition}
              input={inputOf(acquisition.id)}
              readOnly={readOnly}
              onEdit={() => onEdit(acquisition.id)}
              onClock={() => onClock(acquisition.id)}
              onTakeOffClock={() => store.getState().changeCompanion(acquisition.id, null)}
              onRemove={() => store.getState().remove(acquisition.id)}
              onLookAgain={() => store.getState().lookAgain(acquisition.id)}
            />
          ))}
        </ul>
      )}
      {samples.length === 0 ? null : (
        <div className="mt-4">
          <Menu
            trigger={<Button size="sm">Open samples</Button>}
            items={samples.map(({ label, open }) => ({ label, onSelect: open }))}
          />
        </div>
      )}
    </Region>
  );
}

const NOTHING = 'none';

function Inputs({ shelf }: { shelf: readonly Acquisition[] }) {
  const { store } = useBench();
  const study = useBenchPlan(currentStudy);
  const assignment = useBenchPlan(currentAssignment);
  if (study === null || shelf.length === 0) return null;
  return (
    <div className="mb-4 flex flex-col gap-1.5">
      <h3 className="font-mono text-xs text-dim">inputs of {study.label}</h3>
      {study.inputs.map((spec) => (
        <Field key={spec.name} label={spec.label}>
          {(control) => (
            <Select
              {...control}
              className="w-full"
              value={assignment[spec.name] ?? NOTHING}
              options={[
                { value: NOTHING, label: 'nothing' },
                ...shelf.map((acquisition) => ({
                  value: acquisition.id,
                  label: acquisition.name,
                  disabled: acquisition.layout !== null && !fits(acquisition, spec),
                })),
              ]}
              onValueChange={(id) => store.getState().assign(spec.name, id === NOTHING ? null : id)}
            />
          )}
        </Field>
      ))}
    </div>
  );
}
