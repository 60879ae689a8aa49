import { Button } from '../components/ui/Button';
import { Dialog } from '../components/ui/Dialog';
import { NumberField } from '../components/ui/NumberField';
import {
  coresOfMachine,
  DEFAULT_PAIR_MIB,
  MOST_PAIR_MIB,
  useEngineSettings,
  workerCount,
} from '../lib/workers/engine-settings';

/** What the engine may take of this machine. */
export function EngineDialog({ onClose }: { onClose(): void }) {
  const { settings, change } = useEngineSettings();
  const cores = coresOfMachine();
  return (
    <Dialog
      open
      onOpenChange={(open) => open || onClose()}
      size="sm"
      title="Engine on this machine"
      description="Remembered for you in this browser, in force from the next run on; a run under way goes on as it began."
      footer={
        <>
          <Button variant="quiet" onClick={() => change({ workers: null, pairMiB: DEFAULT_PAIR_MIB })}>
            Reset to defaults
          </Button>
          <Button variant="primary" onClick={onClose}>
            Done
          </Button>
        </>
      }
    >
      <div className="flex flex-col gap-4">
        <NumberField
          label="Workers"
          value={workerCount(settings)}
          unit={`of ${cores}`}
          integer
          min={1}
          max={cores}
          changed={settings.workers !== null}
          hint="Each counts a part of the file on a core of its own. Fewer leave the machine to others and hold less memory; the numbers are the same."
          onChange={(workers) => change({ workers: workers === cores ? null : workers })}
        />
        <NumberField
          label="Memory for pairs"
          value={settings.pairMiB}
          unit="MiB"
          integer
          min={0}
          max={MOST_PAIR_MIB}
          step={64}
          changed={settings.pairMiB !== DEFAULT_PAIR_MIB}
          hint="The pairs of the last runs are kept, so that window, delay and shifts answer while you turn them. Where they do not fit, the file is read again. 0 keeps none."
          onChange={(pairMiB) => change({ pairMiB })}
        />
      </div>
    </Dialog>
  );
}
