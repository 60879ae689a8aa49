import { useRef, useState } from 'react';
import type { ProblemData } from '../../../../shared/errors/problem';
import { bytesWords } from '../../../components/output/reading-words';
import { Button } from '../../../components/ui/Button';
import { Dialog } from '../../../components/ui/Dialog';
import { Field } from '../../../components/ui/Field';
import { Select } from '../../../components/ui/Select';
import { type Acquisition, newPart } from '../model/acquisition';
import { companionCandidates } from '../model/companion-draft';
import { useBench, useBenchState } from './bench-context';
import { CompanionForm, type CompanionSource } from './CompanionForm';
import { ProblemText } from './ProblemText';

export interface CompanionDialogProps {
  acquisition: Acquisition;
  onClose(): void;
}

const FORM = 'second-clock';

function heldSource({ companion }: Acquisition): CompanionSource | null {
  if (companion === null) return null;
  const { name, bytes, file, layout } = companion;
  return {
    part: companion,
    looked: { name, bytes, file, reading: { status: 'awaited' } },
    layout,
    fromShelf: null,
  };
}

function shelfSource(acquisition: Acquisition): CompanionSource {
  const { name, bytes, file, sha256, expectedSha256, layout, id } = acquisition;
  const part = { name, bytes, file, sha256, expectedSha256 };
  return { part, looked: acquisition, layout, fromShelf: id };
}

/** What stands in the list of the shelf needs no name beside it. */
function chosenName(source: CompanionSource | null): string {
  return source === null || source.fromShelf !== null ? '' : source.part.name;
}

/** A second file of the same acquisition, written by a tagger whose clock runs on its own. */
export function CompanionDialog({ acquisition, onClose }: CompanionDialogProps) {
  const { engine } = useBench();
  const shelf = useBenchState((state) => state.shelf);
  const [source, setSource] = useState<CompanionSource | null>(() => heldSource(acquisition));
  const [problem, setProblem] = useState<ProblemData | null>(null);
  const [looking, setLooking] = useState<string | null>(null);
  const picker = useRef<HTMLInputElement>(null);
  const candidates = companionCandidates(shelf, acquisition);

  const take = async (file: File): Promise<void> => {
    setProblem(null);
    setLooking(file.name);
    const outcome = await engine.inspect({ name: file.name, size: file.size, file }, null);
    setLooking(null);
    if (outcome.status === 'error') setProblem(outcome.problem);
    if (outcome.status !== 'ok') return;
    const inspection = outcome.value;
    const { name, bytes, ...rest } = newPart(file);
    setSource({
      part: { name, bytes, ...rest },
      looked: { name, bytes, file, reading: { status: 'read', inspection } },
      layout: inspection.layout,
      fromShelf: null,
    });
  };
  return (
    <Dialog
      open
      onOpenChange={(open) => open || onClose()}
      size="lg"
      title={`Second clock of ${acquisition.name}`}
      description="Another file of the same acquisition, written by a tagger of its own. Its times are brought onto the clock of the first."
      footer={
        <>
          <Button variant="quiet" onClick={onClose}>
            Cancel
          </Button>
          <Button variant="primary" type="submit" form={FORM} disabled={source === null}>
            Apply
          </Button>
        </>
      }
    >
      <div className="mb-6 flex flex-wrap items-end gap-3">
        {candidates.length === 0 ? null : (
          <Field label="From the shelf">
            {(control) => (
              <Select
                {...control}
                value={source?.fromShelf ?? undefined}
                placeholder="choose an acquisition"
                options={candidates.map(({ id, name, bytes }) => ({
                  value: id,
                  label: name,
                  hint: bytesWords(bytes),
                }))}
                onValueChange={(id) => {
                  const chosen = candidates.find((each) => each.id === id);
                  if (chosen !== undefined) setSource(shelfSource(chosen));
                }}
              />
            )}
          </Field>
        )}
        <input
          ref={picker}
          type="file"
          hidden
          aria-label="File of the second clock"
          data-testid="companion-file"
          onChange={(event) => {
            const file = event.target.files?.[0];
            event.target.value = '';
            if (file !== undefined) void take(file);
          }}
        />
        <Button onClick={() => picker.current?.click()}>
          {source === null ? 'Choose a file' : 'Choose another file'}
        </Button>
        <p role="status" className="min-w-0 self-center text-sm wrap-anywhere text-dim">
          {looking === null ? chosenName(source) : `looking at ${looking}`}
        </p>
      </div>
      {problem === null ? null : <ProblemText problem={problem} />}
      {source === null ? (
        <p className="max-w-prose text-sm text-dim">
          HDF5, NumPy, text or binary records with time tags. The offset between the clocks and their drift
          are found from the coincidences, unless you give them.
        </p>
      ) : (
        <CompanionForm
          key={`${source.part.name} ${source.fromShelf ?? ''}`}
          formId={FORM}
          acquisition={acquisition}
          source={source}
          onDone={onClose}
        />
      )}
    </Dialog>
  );
}
