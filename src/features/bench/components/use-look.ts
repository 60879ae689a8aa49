import { useCallback, useEffect, useRef, useState } from 'react';
import type { DatasetFact, Inspection } from '../../../../shared/contracts/engine';
import type { Layout } from '../../../../shared/contracts/layout';
import type { ProblemData } from '../../../../shared/errors/problem';
import type { Acquisition } from '../model/acquisition';
import { useBench } from './bench-context';

/** While a field is being typed in, the bytes are looked at once it rests this long. */
const REST_MS = 350;

export type LookState =
  | { status: 'none' }
  | { status: 'read'; inspection: Inspection }
  | { status: 'failed'; problem: ProblemData };

export interface Look {
  state: LookState;
  /** True while `state` belongs to an earlier layout. */
  isBehind: boolean;
  /** Of the last look that listed any. */
  datasets: readonly DatasetFact[];
  again(): void;
}

/** The file that is looked at. */
export type Looked = Pick<Acquisition, 'name' | 'bytes' | 'file' | 'reading'>;

function firstState({ reading }: Looked, inspection: Inspection | null): LookState {
  if (inspection !== null) return { status: 'read', inspection };
  return reading.status === 'failed' ? { status: 'failed', problem: reading.problem } : { status: 'none' };
}

/** What the bytes give with the layout in the dialog, looked at again whenever it changes. */
export function useLook(looked: Looked, layout: Layout | null, inspection: Inspection | null): Look {
  const { engine } = useBench();
  const [state, setState] = useState(() => firstState(looked, inspection));
  const [datasets, setDatasets] = useState<readonly DatasetFact[]>(inspection?.datasets ?? []);
  const wanted = JSON.stringify(layout);
  // The first look was made with the layout the dialog opens with.
  const [lookedAt, setLookedAt] = useState(inspection === null ? null : wanted);
  const latest = useRef(0);
  const { name, bytes, file } = looked;

  const lookAt = useCallback(
    async (key: string): Promise<void> => {
      if (file === null) return;
      const turn = ++latest.current;
      const outcome = await engine.inspect({ name, size: bytes, file }, JSON.parse(key) as Layout | null);
      if (latest.current !== turn || outcome.status === 'cancelled') return;
      setLookedAt(key);
      if (outcome.status === 'error') setState({ status: 'failed', problem: outcome.problem });
      else {
        setState({ status: 'read', inspection: outcome.value });
        if (outcome.value.datasets.length > 0) setDatasets(outcome.value.datasets);
      }
    },
    [engine, name, bytes, file],
  );

  useEffect(() => {
    if (wanted === 'null' || wanted === lookedAt) return;
    const timer = setTimeout(() => void lookAt(wanted), REST_MS);
    return () => clearTimeout(timer);
  }, [wanted, lookedAt, lookAt]);

  return { state, isBehind: wanted !== lookedAt, datasets, again: () => void lookAt(wanted) };
}
