import { create } from 'zustand';
import { z } from '../../../shared/util/zod';
import { readSetting, writeSetting } from '../settings';

/** What the engine may take of this machine. */
export interface EngineSettings {
  /** Compute workers; null: one a core. */
  workers: number | null;
  /** For pairs kept between runs; 0 keeps none. */
  pairMiB: number;
}

export const DEFAULT_PAIR_MIB = 512;
export const MOST_PAIR_MIB = 16_384;

const defaults: EngineSettings = { workers: null, pairMiB: DEFAULT_PAIR_MIB };

const schema = z.object({
  workers: z.int().min(1).nullable(),
  pairMiB: z.int().min(0).max(MOST_PAIR_MIB),
});

export function coresOfMachine(): number {
  return Math.max(1, navigator.hardwareConcurrency || 1);
}

/** Settings made on a larger machine are held to this one. */
export function workerCount({ workers }: EngineSettings): number {
  return Math.min(coresOfMachine(), workers ?? coresOfMachine());
}

interface EngineSettingsState {
  settings: EngineSettings;
  key: string;
  /** The settings of the person who is signed in, as far as this browser knows them. */
  openFor(personId: string): void;
  change(part: Partial<EngineSettings>): void;
}

function read(key: string): EngineSettings {
  const text = readSetting(key);
  if (text === null) return defaults;
  try {
    return schema.parse(JSON.parse(text));
  } catch (error) {
    // Written by a later version or by hand: what cannot be read is no setting.
    if (error instanceof SyntaxError || error instanceof z.ZodError) return defaults;
    throw error;
  }
}

/** Remembered for each person in this browser; the engine takes them at its next start. */
export const useEngineSettings = create<EngineSettingsState>()((set, get) => ({
  settings: defaults,
  key: 'engine',
  openFor(personId) {
    const key = `engine.${personId}`;
    set({ key, settings: read(key) });
  },
  change(part) {
    const settings = { ...get().settings, ...part };
    writeSetting(get().key, JSON.stringify(settings));
    set({ settings });
  },
}));
