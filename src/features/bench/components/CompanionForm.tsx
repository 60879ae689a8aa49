import { type FormEvent, useMemo, useState } from 'react';
import type { Layout } from '../../../../shared/contracts/layout';
import { Field } from '../../../components/ui/Field';
import { NumberField } from '../../../components/ui/NumberField';
import { Select } from '../../../components/ui/Select';
import type { Acquisition, FilePart } from '../model/acquisition';
import { type CompanionDraft, draftCompanion, readClock } from '../model/companion-draft';
import { readLayout } from '../model/read-layout';
import { useBench } from './bench-context';
import { FormPart } from './FormPart';
import { LayoutForm } from './LayoutForm';
import { ReadingPreview } from './ReadingPreview';
import { type Looked, useLook } from './use-look';

/** The file of a second clock, before it is applied. */
export interface CompanionSource {
  part: FilePart;
  looked: Looked;
  layout: Layout | null;
  /** The acquisition it is now, where it comes from the shelf. */
  fromShelf: string | null;
}

export interface CompanionFormProps {
  formId: string;
  acquisition: Acquisition;
  source: CompanionSource;
  onDone(): void;
}

const CLOCKS = [
  { value: 'found', label: 'found from the coincidences' },
  { value: 'given', label: 'known' },
] as const;

/** How the file of the second clock is read and how its channels and times are brought onto the first. */
export function CompanionForm({ formId, acquisition, source, onDone }: CompanionFormProps) {
  const { store } = useBench();
  const { part, looked, fromShelf } = source;
  const first = looked.reading.status === 'read' ? looked.reading.inspection : null;
  const [draft, setDraft] = useState<CompanionDraft>(() =>
    draftCompanion(source.layout, first, acquisition, acquisition.companion),
  );
  const [tried, setTried] = useState(false);
  const reading = useMemo(() => readLayout(draft.layout), [draft.layout]);
  const clock = useMemo(() => readClock(draft), [draft]);
  const look = useLook(looked, reading.layout, first);
  const change = (change: Partial<CompanionDraft>): void => setDraft((now) => ({ ...now, ...change }));
  const errors = { ...reading.errors, ...clock.errors };
  const shown = tried ? errors : {};
  const count = Object.keys(errors).length;
  const isRead = look.state.status === 'read' && !look.isBehind;
  const isTags = look.state.status !== 'read' || look.state.inspection.facts.kind !== 'frames';

  const apply = (event: FormEvent): void => {
    event.preventDefault();
    setTried(true);
    const { layout } = reading;
    if (layout === null || layout.kind !== 'tags' || count > 0 || look.state.status !== 'read' || !isRead)
      return;
    const { channelOffset, clock: given } = clock;
    const { facts } = look.state.inspection;
    const { name, bytes, file, sha256, expectedSha256 } = part;
    const companion = {
      name,
      bytes,
      file,
      sha256,
      expectedSha256,
      layout,
      channelOffset,
      clock: given,
      facts,
    };
    store.getState().changeCompanion(acquisition.id, companion, fromShelf ?? undefined);
    onDone();
  };
  return (
    <form id={formId} onSubmit={apply} className="grid grid-cols-1 gap-x-10 gap-y-6 lg:grid-cols-2">
      <LayoutForm
        draft={draft.layout}
        errors={shown}
        datasets={look.datasets}
        tagsOnly
        onChange={(layout) => change({ layout: { ...draft.layout, ...layout } })}
      />
      <ReadingPreview look={look} />
      <FormPart title="onto the first clock">
        <div className="flex flex-col gap-3">
          <NumberField
            label="Added to its channels"
            value={draft.channelOffset}
            integer
            min={0}
            max={65535}
            error={shown.channelOffset}
            hint="So that one detector map names the channels of both files."
            onChange={(channelOffset) => change({ channelOffset })}
          />
          <Field layout="row" label="Offset and drift">
            {(control) => (
              <Select
                {...control}
                value={draft.clock}
                options={CLOCKS}
                onValueChange={(value) => change({ clock: value === 'given' ? 'given' : 'found' })}
              />
            )}
          </Field>
          {draft.clock === 'given' ? (
            <>
              <NumberField
                label="Offset"
                unit="ps"
                value={draft.offsetPs}
                error={shown.offsetPs}
                hint="Added to its times to have those of the first clock."
                onChange={(offsetPs) => change({ offsetPs })}
              />
              <NumberField
                label="Drift"
                unit="ppm"
                value={draft.driftPpm}
                error={shown.driftPpm}
                hint="By how much its times are stretched, in parts per million."
                onChange={(driftPpm) => change({ driftPpm })}
              />
            </>
          ) : null}
        </div>
      </FormPart>
      <p role="status" className="self-end text-sm text-dim">
        {isTags ? '' : 'A second clock must hold time tags; these are frames.'}
        {tried && count > 0 ? `${count === 1 ? 'One field needs' : `${count} fields need`} attention.` : ''}
        {tried && count === 0 && !isRead ? 'The bytes must be read with this layout first.' : ''}
      </p>
    </form>
  );
}
