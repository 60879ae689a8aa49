import { type FormEvent, useState } from 'react';
import { Button } from '../../../components/ui/Button';
import { Dialog } from '../../../components/ui/Dialog';
import { Field, TextInput } from '../../../components/ui/Field';

export interface NameDialogProps {
  title: string;
  description: string;
  suggestion: string;
  /** Closes the dialog when it resolves; what it throws is said in the dialog. */
  onSave(name: string): Promise<void>;
  explainFailure(thrown: unknown): string;
  onClose(): void;
}

const FORM = 'name-to-save';

export function NameDialog({
  title,
  description,
  suggestion,
  onSave,
  explainFailure,
  onClose,
}: NameDialogProps) {
  const [name, setName] = useState(suggestion);
  const [busy, setBusy] = useState(false);
  const [problem, setProblem] = useState<string | null>(null);
  const submit = async (event: FormEvent): Promise<void> => {
    event.preventDefault();
    const given = name.trim();
    if (given === '') return setProblem('Give it a name.');
    setBusy(true);
    setProblem(null);
    try {
      await onSave(given);
      onClose();
    } catch (thrown) {
      setProblem(explainFailure(thrown));
      setBusy(false);
    }
  };
  return (
    <Dialog
      open
      onOpenChange={(open) => open || onClose()}
      size="sm"
      title={title}
      description={description}
      footer={
        <>
          <Button variant="quiet" onClick={onClose}>
            Cancel
          </Button>
          <Button type="submit" form={FORM} variant="primary" disabled={busy}>
            {busy ? 'Saving' : 'Save'}
          </Button>
        </>
      }
    >
      <form id={FORM} onSubmit={(event) => void submit(event)}>
        <Field label="Name" error={problem}>
          {(control) => (
            <TextInput
              {...control}
              value={name}
              maxLength={200}
              autoComplete="off"
              onChange={(event) => setName(event.target.value)}
            />
          )}
        </Field>
      </form>
    </Dialog>
  );
}
