import { ArrowDown, ArrowUp } from 'lucide-react';
import { bytesWords } from '../../../components/output/reading-words';
import { Button } from '../../../components/ui/Button';
import { IconButton } from '../../../components/ui/IconButton';
import type { Acquisition } from '../model/acquisition';
import { sequenceOf } from '../model/sequence';
import { useBench } from './bench-context';

/** The files of one acquisition in the order they are read; a person may change it or take them apart. */
export function SequenceFiles({ acquisition, readOnly }: { acquisition: Acquisition; readOnly: boolean }) {
  const { store } = useBench();
  const files = sequenceOf(acquisition);
  const { id } = acquisition;
  const move = (from: number, to: number): void => store.getState().moveFile(id, from, to);
  return (
    <div className="mt-1">
      <p className="font-mono text-xs text-dim">
        one acquisition in {files.length} files, read in this order
      </p>
      <ol
        className="my-1 max-h-48 overflow-y-auto border-y border-line"
        aria-label={`Files of ${acquisition.name}`}
      >
        {files.map(({ name, bytes }, place) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: the same file may stand twice
          <li key={place} className="flex items-center gap-2 font-mono text-xs text-dim">
            <span className="w-5 shrink-0 text-right">{place + 1}</span>
            <span className="min-w-0 flex-1 wrap-anywhere text-text">{name}</span>
            <span className="shrink-0">{bytesWords(bytes)}</span>
            {readOnly ? null : (
              <span className="flex shrink-0">
                <IconButton
                  label={`Read ${name} earlier`}
                  disabled={place === 0}
                  onClick={() => move(place, place - 1)}
                >
                  <ArrowUp size={12} aria-hidden="true" />
                </IconButton>
                <IconButton
                  label={`Read ${name} later`}
                  disabled={place === files.length - 1}
                  onClick={() => move(place, place + 1)}
                >
                  <ArrowDown size={12} aria-hidden="true" />
                </IconButton>
              </span>
            )}
          </li>
        ))}
      </ol>
      {readOnly ? null : (
        <Button size="sm" onClick={() => store.getState().split(id)}>
          Make them separate acquisitions
        </Button>
      )}
    </div>
  );
}
