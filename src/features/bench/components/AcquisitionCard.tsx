import { SlidersHorizontal, Timer, X } from 'lucide-react';
import type { Detector } from '../../../../shared/contracts/detector';
import type { InspectionFacts } from '../../../../shared/contracts/engine';
import { describeDetector, describeLayout, describePlane } from '../../../components/output/input-words';
import { bytesWords, factsWords } from '../../../components/output/reading-words';
import { Button } from '../../../components/ui/Button';
import { IconButton } from '../../../components/ui/IconButton';
import { RateStrip } from '../../../viz/RateStrip';
import type { Tone } from '../../../viz/types';
import { type Acquisition, bytesOf, isOtherFile } from '../model/acquisition';
import { factsOf } from '../model/companion';
import { Caution } from './Caution';
import { CompanionLine } from './CompanionLine';
import { ProblemText } from './ProblemText';
import { SequenceFiles } from './SequenceFiles';

export interface AcquisitionCardProps {
  acquisition: Acquisition;
  /** Input of the study it serves. */
  input: string | null;
  readOnly: boolean;
  onEdit(): void;
  /** Opens the dialog of the second clock. */
  onClock(): void;
  onTakeOffClock(): void;
  onRemove(): void;
  onLookAgain(): void;
}

/** One acquisition: what it is called, how it is read, what was seen, what is wrong. */
export function AcquisitionCard(props: AcquisitionCardProps) {
  const { acquisition, input, readOnly, onEdit, onClock, onRemove, onLookAgain } = props;
  const { name, reading, sha256, sample, following, companion } = acquisition;
  const mayPair = reading.status === 'read' && acquisition.layout?.kind === 'tags' && companion === null;
  return (
    <li className="py-2.5" aria-label={name} data-acquisition={name}>
      <div className="flex items-start justify-between gap-2">
        <span className={`min-w-0 pt-1 font-semibold wrap-anywhere ${input === null ? 'text-dim' : ''}`}>
          {name}
        </span>
        <span className="-mr-1.5 flex shrink-0">
          {reading.status === 'awaited' || reading.status === 'looking' || readOnly ? null : (
            <IconButton label={`Edit the reading of ${name}`} onClick={onEdit}>
              <SlidersHorizontal size={14} aria-hidden="true" />
            </IconButton>
          )}
          {readOnly || !mayPair ? null : (
            <IconButton label={`Give ${name} a second clock`} onClick={onClock}>
              <Timer size={14} aria-hidden="true" />
            </IconButton>
          )}
          <IconButton label={`Remove ${name}`} onClick={onRemove}>
            <X size={14} aria-hidden="true" />
          </IconButton>
        </span>
      </div>
      <p className="font-mono text-xs text-dim">
        {input === null ? 'not used by this study' : `serves ${input}`} · {bytesWords(bytesOf(acquisition))}
        {sample === null ? '' : ' · sample'}
        {sha256 === null ? '' : ` · sha ${sha256.slice(0, 4)}…${sha256.slice(-2)}`}
      </p>
      {following.length === 0 ? null : <SequenceFiles acquisition={acquisition} readOnly={readOnly} />}
      <div className="mt-1">
        {reading.status === 'looking' ? (
          <p role="status" className="font-mono text-xs text-dim">
            looking at the bytes
          </p>
        ) : null}
        {reading.status === 'awaited' && sample !== null ? (
          <p role="status" className="font-mono text-xs text-dim">
            fetching the sample
          </p>
        ) : null}
        {reading.status === 'awaited' && sample === null ? (
          <Caution>
            Drop {name} again, or open it: the session knows it by name and size, its bytes stayed on your
            machine.
          </Caution>
        ) : null}
        {isOtherFile(acquisition) ? (
          <Caution>
            Not the file the session was made with: name and size agree, the fingerprint does not. Numbers
            from it are of other data; remove it and drop the right one to go on with the session.
          </Caution>
        ) : null}
        {reading.status === 'failed' ? (
          <ProblemText problem={reading.problem}>
            <Button size="sm" onClick={onLookAgain}>
              Look again
            </Button>
            {readOnly ? null : (
              <Button size="sm" onClick={onEdit}>
                Describe its layout
              </Button>
            )}
          </ProblemText>
        ) : null}
        {reading.status === 'read' ? (
          <Known
            acquisition={acquisition}
            facts={reading.inspection.facts}
            warnings={reading.inspection.warnings}
          />
        ) : null}
        {companion === null ? null : (
          <CompanionLine
            companion={companion}
            readOnly={readOnly}
            onEdit={onClock}
            onRemove={props.onTakeOffClock}
          />
        )}
      </div>
    </li>
  );
}

interface KnownProps {
  acquisition: Acquisition;
  facts: InspectionFacts;
  warnings: readonly string[];
}

function Known({ acquisition, facts, warnings }: KnownProps) {
  const { layout, detector, detectorGiven, plane } = acquisition;
  const seen = factsOf(acquisition) ?? facts;
  const strip = detector === null ? [] : countsByArm(seen, detector);
  return (
    <div className="flex flex-col gap-0.5 font-mono text-xs text-dim">
      <p>
        {factsWords(facts)}
        {acquisition.following.length === 0 ? '' : ' in the first file'}
      </p>
      <p className="wrap-anywhere">
        {layout === null ? 'layout not known' : describeLayout(layout).join(' · ')}
      </p>
      <p>
        {detector === null ? 'no detector map' : describeDetector(detector, detectorGiven).join(' · ')}
        {detector === null || detectorGiven ? '' : ' · proposed, pitch not given'}
      </p>
      {plane === null ? null : <p>{describePlane(plane).join(' · ')}</p>}
      {warnings.map((warning) => (
        <Caution key={warning}>{warning}</Caution>
      ))}
      {strip.length === 0 ? null : (
        <div className="mt-1.5">
          <RateStrip
            series={strip}
            height={14 * strip.length}
            label={`Counts per channel: ${strip.map(({ label }) => label).join(', ')}`}
          />
          <p className="mt-0.5">counts per channel · {strip.map(({ label }) => label).join(', ')}</p>
        </div>
      )}
    </div>
  );
}

/** Counts along the channels of each array: a dead or a hot pixel, a swapped cable, shows at a glance. */
export function countsByArm(
  facts: InspectionFacts,
  detector: Detector,
): { tone: Tone; label: string; values: Float64Array }[] {
  if (facts.kind !== 'tags' || detector.kind !== 'tags') return [];
  const counts = new Map(facts.channels.map(({ channel, count }) => [channel, count]));
  return (['signal', 'idler'] as const).flatMap((arm) => {
    const array = detector[arm];
    if (array === undefined || array.width * array.height < 2) return [];
    const values = Float64Array.from(
      { length: array.width * array.height },
      (_, i) => counts.get(array.firstChannel + i) ?? 0,
    );
    return [{ tone: arm, label: arm, values }];
  });
}
