import { useMemo, useState } from 'react';
import type { Inspection } from '../../../../shared/contracts/engine';
import { bytesWords } from '../../../components/output/reading-words';
import { Button } from '../../../components/ui/Button';
import { Dialog } from '../../../components/ui/Dialog';
import type { Acquisition } from '../model/acquisition';
import { jointFacts } from '../model/companion';
import { proposeDetector } from '../model/propose-detector';
import { readDetector, readPlane } from '../model/read-detector';
import { readLayout } from '../model/read-layout';
import { draftReading, type ReadingDraft } from '../model/reading-draft';
import { useBench } from './bench-context';
import { DetectorForm } from './DetectorForm';
import { LayoutForm } from './LayoutForm';
import { PlaneForm } from './PlaneForm';
import { ReadingPreview } from './ReadingPreview';
import { useLook } from './use-look';

export interface ReadingDialogProps {
  acquisition: Acquisition;
  onClose(): void;
}

function lastInspection({ reading }: Acquisition): Inspection | null {
  return reading.status === 'read' ? reading.inspection : null;
}

function describe({ bytes, following }: Acquisition): string {
  const whole =
    following.length === 0
      ? `${bytesWords(bytes)}.`
      : `The first of ${following.length + 1} files; all are read alike.`;
  return `${whole} What the bytes suggest stands here; correct what is wrong.`;
}

/** Why the map is as proposed; null once a person gave or corrected it. */
function becauseOf(
  { detector, detectorGiven, companion }: Acquisition,
  { facts }: Inspection,
): string | null {
  const proposal = proposeDetector(jointFacts(facts, companion));
  const isProposal = !detectorGiven && JSON.stringify(proposal?.detector) === JSON.stringify(detector);
  return isProposal ? (proposal?.because ?? null) : null;
}

/** How the bytes are read: a proposal from the bytes, what it gives, and every correction a person may make. */
export function ReadingDialog({ acquisition, onClose }: ReadingDialogProps) {
  const { store } = useBench();
  const first = lastInspection(acquisition);
  const [draft, setDraft] = useState<ReadingDraft>(() =>
    draftReading(
      acquisition.layout,
      acquisition.detector,
      acquisition.detectorGiven,
      acquisition.plane,
      first,
    ),
  );
  const [proposedFrom, setProposedFrom] = useState(() => first && becauseOf(acquisition, first));
  const [tried, setTried] = useState(false);
  const layout = useMemo(() => readLayout(draft), [draft]);
  const detector = useMemo(() => readDetector(draft), [draft]);
  const plane = useMemo(() => readPlane(draft), [draft]);
  const look = useLook(acquisition, layout.layout, first);
  const change = (part: Partial<ReadingDraft>): void => setDraft((now) => ({ ...now, ...part }));

  const errors = { ...layout.errors, ...detector.errors, ...plane.errors };
  const shown = tried ? errors : {};
  const count = Object.keys(errors).length;
  const isRead = look.state.status === 'read' && !look.isBehind;
  const apply = (): void => {
    setTried(true);
    if (layout.layout === null || count > 0 || look.state.status !== 'read' || look.isBehind) return;
    store.getState().changeReading(acquisition.id, {
      layout: layout.layout,
      detector: detector.detector,
      detectorGiven: detector.given,
      plane: plane.plane,
      inspection: look.state.inspection,
    });
    onClose();
  };
  const propose = (): void => {
    if (look.state.status !== 'read') return;
    const proposal = proposeDetector(jointFacts(look.state.inspection.facts, acquisition.companion));
    setProposedFrom(proposal?.because ?? 'No plain arrangement fits the channels seen; describe the arrays.');
    if (proposal === null) return;
    const { signal, idler, bucket, frameMasked } = draftReading(null, proposal.detector, false, null, null);
    change({ signal, idler, bucket, frameMasked });
  };
  return (
    <Dialog
      open
      onOpenChange={(open) => open || onClose()}
      size="lg"
      title={`Reading of ${acquisition.name}`}
      description={describe(acquisition)}
      footer={
        <>
          <span role="status" className="flex-1 text-sm text-dim">
            {tried && count > 0
              ? `${count === 1 ? 'One field needs' : `${count} fields need`} attention.`
              : ''}
            {tried && count === 0 && !isRead ? 'The bytes must be read with this layout first.' : ''}
          </span>
          <Button variant="quiet" onClick={onClose}>
            Cancel
          </Button>
          <Button variant="primary" onClick={apply}>
            Apply
          </Button>
        </>
      }
    >
      <div className="grid grid-cols-1 gap-x-10 gap-y-6 lg:grid-cols-2">
        <LayoutForm draft={draft} errors={shown} datasets={look.datasets} onChange={change} />
        <ReadingPreview look={look} />
        <DetectorForm
          draft={draft}
          errors={shown}
          proposedFrom={proposedFrom}
          onChange={change}
          onPropose={propose}
        />
        <PlaneForm draft={draft} errors={shown} onChange={change} />
      </div>
    </Dialog>
  );
}
