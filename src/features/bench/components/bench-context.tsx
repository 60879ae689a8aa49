import { createContext, type ReactNode, useContext, useEffect, useMemo, useState } from 'react';
import { useStore } from 'zustand';
import { useShallow } from 'zustand/react/shallow';
import { getEngine } from '../../../lib/workers/engine-client';
import type { EngineDoor } from '../../../lib/workers/engine-door';
import type { BenchPlan } from '../model/bench-selectors';
import { type BenchActions, type BenchStore, createBenchStore } from '../model/bench-store';
import type { BenchState } from '../model/bench-types';
import { attachRunner, type Runner } from '../model/run-bench';

export interface Bench {
  store: BenchStore;
  runner: Runner;
  engine: EngineDoor;
  /** The address that was opened last, so that coming back to it changes nothing. */
  openedFrom: { current: string | null };
}

const BenchContext = createContext<Bench | null>(null);

export function createBench(engine: EngineDoor): Bench {
  const store = createBenchStore(engine);
  return { store, engine, runner: attachRunner(store, engine), openedFrom: { current: null } };
}

let pageBench: Bench | null = null;

/** One bench a page: what is on it survives a visit to another page. */
function getPageBench(): Bench {
  pageBench ??= createBench(getEngine());
  return pageBench;
}

export function BenchProvider({ bench, children }: { bench?: Bench; children: ReactNode }) {
  const [own] = useState(() => bench ?? getPageBench());
  useEffect(() => {
    if (own.store.getState().studies.length === 0) void own.store.getState().loadStudies();
  }, [own]);
  return <BenchContext value={own}>{children}</BenchContext>;
}

export function useBench(): Bench {
  const bench = useContext(BenchContext);
  if (bench === null) throw new Error('This part of the page belongs inside a BenchProvider.');
  return bench;
}

export function useBenchState<T>(select: (state: BenchState & BenchActions) => T): T {
  return useStore(useBench().store, select);
}

/** For selectors that build new objects: they run only when the plan of the bench changes, not with every progress. */
export function useBenchPlan<T>(select: (plan: BenchPlan) => T): T {
  const plan = useStore(
    useBench().store,
    useShallow(({ study, studies, shelf, chosen, dials, preset, seed }) => ({
      study,
      studies,
      shelf,
      chosen,
      dials,
      preset,
      seed,
    })),
  );
  return useMemo(() => select(plan), [select, plan]);
}
