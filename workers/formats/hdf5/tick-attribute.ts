import { absolutePath, type Hdf5Tree } from './tree';

const unitFs: Record<string, number> = { fs: 1, ps: 1e3, ns: 1e6, us: 1e9, ms: 1e12, s: 1e15 };

/** "tick_ps", "time_resolution_ns", "tickFs": a tick or resolution whose name ends in a unit of time. */
function unitOf(name: string): number | undefined {
  if (!/tick|resolution/i.test(name)) return undefined;
  const unit = /[_ .-](fs|ps|ns|us|ms|s)$/i.exec(name)?.[1] ?? /[a-z](Fs|Ps|Ns|Us|Ms|S)$/.exec(name)?.[1];
  return unit === undefined ? undefined : unitFs[unit.toLowerCase()];
}

export interface NamedTick {
  tickFs: number;
  name: string;
  path: string;
}

/** The tick length that an attribute names, on the dataset or the nearest group above it; null when none does. */
export function namedTick(tree: Hdf5Tree, dataset: string): NamedTick | null {
  const isWanted = (name: string): boolean => unitOf(name) !== undefined;
  for (const path of upwards(absolutePath(dataset))) {
    for (const [name, value] of tree.attributes(path, isWanted)) {
      // Rounded to a millionth of a femtosecond: 0.081 ns must give 81000 fs, not 81000.00000000001.
      const tickFs = Math.round(value * unitOf(name)! * 1e6) / 1e6;
      if (tickFs > 0 && tickFs <= 1e15) return { tickFs, name, path };
    }
  }
  return null;
}

function upwards(path: string): string[] {
  const parts = path.split('/').filter(Boolean);
  return [...parts.map((_, k) => `/${parts.slice(0, parts.length - k).join('/')}`), '/'];
}
