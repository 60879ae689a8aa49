import { describeLayout } from '../../../components/output/input-words';
import { bytesWords } from '../../../components/output/reading-words';
import { Button } from '../../../components/ui/Button';
import { formatPlain } from '../../../lib/format-number';
import type { CompanionFile } from '../model/acquisition';

export interface CompanionLineProps {
  companion: CompanionFile;
  readOnly: boolean;
  onEdit(): void;
  onRemove(): void;
}

function clockWords({ clock }: CompanionFile): string {
  if (clock === null) return 'clock found from the coincidences';
  return `clock ${formatPlain(clock.offsetPs)} ps off, drift ${formatPlain(clock.drift * 1e6)} ppm`;
}

/** The second file of an acquisition, on a clock of its own. */
export function CompanionLine({ companion, readOnly, onEdit, onRemove }: CompanionLineProps) {
  const { name, bytes, layout, channelOffset } = companion;
  const words = [
    bytesWords(bytes),
    ...describeLayout(layout),
    channelOffset === 0 ? 'channels as they are' : `channels + ${channelOffset}`,
    clockWords(companion),
  ];
  return (
    <div className="mt-1.5 border-t border-line pt-1.5">
      <p className="text-sm wrap-anywhere">
        <span className="font-mono text-xs text-dim">second clock </span>
        {name}
      </p>
      <p className="font-mono text-xs wrap-anywhere text-dim">{words.join(' · ')}</p>
      {readOnly ? null : (
        <span className="mt-1 flex gap-2">
          <Button size="sm" onClick={onEdit}>
            Edit<span className="sr-only"> the second clock {name}</span>
          </Button>
          <Button size="sm" variant="quiet" onClick={onRemove}>
            Take off<span className="sr-only"> the second clock {name}</span>
          </Button>
        </span>
      )}
    </div>
  );
}
