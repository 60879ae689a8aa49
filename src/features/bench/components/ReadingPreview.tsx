import type { InspectionFacts } from '../../../../shared/contracts/engine';
import { factsWords } from '../../../components/output/reading-words';
import { Button } from '../../../components/ui/Button';
import { CheckMark } from '../../../components/ui/CheckMark';
import { Table, Td, Th } from '../../../components/ui/Table';
import { formatCount, formatPlain, formatRate } from '../../../lib/format-number';
import { FormPart } from './FormPart';
import { ProblemText } from './ProblemText';
import type { Look } from './use-look';

const MOST_RECORDS = 20;
const MOST_CHANNELS = 64;

/** What the layout gives: why it was proposed, what looks wrong, the first records, the counts per channel. */
export function ReadingPreview({ look }: { look: Look }) {
  const { state, isBehind } = look;
  return (
    <FormPart
      title="what it gives"
      note={isBehind && state.status !== 'none' ? 'of the layout before' : undefined}
      actions={
        <Button size="sm" onClick={look.again}>
          Look again
        </Button>
      }
    >
      {state.status === 'none' ? (
        <p className="text-sm text-dim">Describe the layout to see its records.</p>
      ) : null}
      {state.status === 'failed' ? <ProblemText problem={state.problem} /> : null}
      {state.status === 'read' ? (
        <div className={`flex flex-col gap-3 ${isBehind ? 'opacity-60' : ''}`}>
          <p className="text-sm">{state.inspection.because}</p>
          <p className="font-mono text-xs text-dim">
            {factsWords(state.inspection.facts)} · read by {state.inspection.reader}
          </p>
          <ReaderReason reader={state.inspection.reader} />
          {state.inspection.warnings.map((warning) => (
            <p key={warning} className="flex gap-2 text-sm">
              <span className="pt-0.5">
                <CheckMark status="caution" />
              </span>
              {warning}
            </p>
          ))}
          <Facts facts={state.inspection.facts} />
        </div>
      ) : null}
    </FormPart>
  );
}

/** HDF5 alone has two readers; which one took the file, its headers decided. */
const REASONS: Record<string, string> = {
  jsfive:
    'jsfive, the light reader, takes this file: its headers hold only what that reader is proven to read exactly.',
  h5wasm:
    'h5wasm, the HDF5 library itself, takes this file: it is large, or its headers hold something the light reader is not proven to read exactly.',
};

function ReaderReason({ reader }: { reader: string }) {
  const reason = REASONS[reader];
  return reason === undefined ? null : <p className="text-sm text-dim">{reason}</p>;
}

function Facts({ facts }: { facts: InspectionFacts }) {
  if (facts.kind === 'none') return null;
  if (facts.kind === 'frames') {
    return (
      <p className="font-mono text-xs text-dim">
        mean {formatPlain(facts.mean, 4)} · largest {formatPlain(facts.max, 6)} · over{' '}
        {formatCount(facts.sampled)} frames
      </p>
    );
  }
  const seconds = facts.sampledSeconds;
  return (
    <div className="grid grid-cols-2 gap-x-6">
      <section
        className="max-h-72 overflow-y-auto"
        aria-label="First records"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: a region that scrolls must be reachable by keyboard
        tabIndex={0}
      >
        <Table label="First records">
          <thead>
            <tr>
              <Th numeric>tick</Th>
              <Th numeric>channel</Th>
            </tr>
          </thead>
          <tbody>
            {facts.first.slice(0, MOST_RECORDS).map(({ tick, channel }, i) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: records have no other identity than their place
              <tr key={i}>
                <Td numeric>{tick}</Td>
                <Td numeric>{channel}</Td>
              </tr>
            ))}
          </tbody>
        </Table>
      </section>
      <section
        className="max-h-72 overflow-y-auto"
        aria-label="Counts per channel"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: a region that scrolls must be reachable by keyboard
        tabIndex={0}
      >
        <Table label="Counts per channel">
          <thead>
            <tr>
              <Th numeric>channel</Th>
              <Th numeric>counts</Th>
              <Th numeric>rate</Th>
            </tr>
          </thead>
          <tbody>
            {facts.channels.slice(0, MOST_CHANNELS).map(({ channel, count }) => (
              <tr key={channel}>
                <Td numeric>{channel}</Td>
                <Td numeric>{formatCount(count)}</Td>
                <Td numeric>{seconds > 0 ? formatRate(count / seconds, Math.sqrt(count) / seconds) : ''}</Td>
              </tr>
            ))}
          </tbody>
        </Table>
        {facts.channels.length > MOST_CHANNELS ? (
          <p className="font-mono text-xs text-dim">and {facts.channels.length - MOST_CHANNELS} more</p>
        ) : null}
      </section>
    </div>
  );
}
