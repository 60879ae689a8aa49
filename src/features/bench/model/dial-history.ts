import type { DialSpec, DialValue, DialValues } from '../../../../shared/contracts/dial';

/** Turns of one dial within this time are one step back: a drag is undone as a whole. */
const SAME_TURN_MS = 700;
const MOST_STEPS = 200;

export interface DialHistory {
  /** Only dials that were set; the others hold their defaults. */
  present: DialValues;
  past: readonly DialValues[];
  future: readonly DialValues[];
  lastTurn: { dials: string; at: number } | null;
}

export function startHistory(present: DialValues): DialHistory {
  return { present, past: [], future: [], lastTurn: null };
}

function sameValue(a: DialValue | undefined, b: DialValue | undefined): boolean {
  return JSON.stringify(a) === JSON.stringify(b);
}

/** Sets one or more dials as one step. */
export function turnDials(history: DialHistory, values: DialValues, at: number): DialHistory {
  const ids = Object.keys(values).sort();
  if (ids.every((id) => sameValue(history.present[id], values[id]))) return history;
  const dials = ids.join(' ');
  const { lastTurn } = history;
  const isSameTurn = lastTurn !== null && lastTurn.dials === dials && at - lastTurn.at < SAME_TURN_MS;
  return {
    present: { ...history.present, ...values },
    past: isSameTurn ? history.past : [...history.past, history.present].slice(-MOST_STEPS),
    future: [],
    lastTurn: { dials, at },
  };
}

export function replaceDials(history: DialHistory, present: DialValues): DialHistory {
  return { present, past: [...history.past, history.present].slice(-MOST_STEPS), future: [], lastTurn: null };
}

export function undoDials(history: DialHistory): DialHistory {
  const present = history.past[history.past.length - 1];
  if (present === undefined) return history;
  return {
    present,
    past: history.past.slice(0, -1),
    future: [history.present, ...history.future],
    lastTurn: null,
  };
}

export function redoDials(history: DialHistory): DialHistory {
  const [present, ...future] = history.future;
  if (present === undefined) return history;
  return { present, past: [...history.past, history.present], future, lastTurn: null };
}

/** Every dial of a study, defaults filled in; values the study does not know are left out. */
export function completeDials(specs: readonly DialSpec[], set: DialValues): DialValues {
  return Object.fromEntries(
    specs.map((spec) => {
      const value = set[spec.id];
      return [spec.id, value === undefined ? spec.default : value];
    }),
  );
}

/** Dials that differ from the preset's, or from the defaults where the preset is silent. */
export function changedDials(
  specs: readonly DialSpec[],
  values: DialValues,
  base: DialValues,
): ReadonlySet<string> {
  const was = completeDials(specs, base);
  const now = completeDials(specs, values);
  return new Set(specs.filter(({ id }) => !sameValue(was[id], now[id])).map(({ id }) => id));
}
