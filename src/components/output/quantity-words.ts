import type { VerdictLevel } from '../../../shared/contracts/output';

/** Quantity and map ids in words: "reid.x.net" is "Reid product, x". The id's last part, raw or net, is the column. */

const WHAT: Record<string, string> = {
  singles: 'Singles',
  'delay.peak': 'Delay of the peak',
  'delay.sigma': 'Width of the peak, σ',
  'window.width': 'Coincidence window',
  coincidences: 'Coincidences',
  'accidentals.product': 'Accidentals, from singles',
  'accidentals.shifted': 'Accidentals, shifted windows',
  'accidentals.sideband': 'Accidentals, sidebands',
  car: 'CAR',
  heralding: 'Heralding efficiency',
  'g2.peak': 'g² at the peak',
  'g2.heralded': 'Heralded g²(0)',
  'clock.offset': 'Clock offset',
  'clock.drift': 'Clock drift',
  'width.minus': 'Difference width',
  'width.plus': 'Sum width',
  'width.conditional': 'Conditional width',
  reid: 'Reid product',
  mancini: 'Mancini product',
  duan: 'Duan sum',
  'entropic.separability': 'Entropic separability',
  'entropic.steering': 'Entropic steering',
  schmidt: 'Schmidt number',
  fedorov: 'Fedorov ratio',
  visibility: 'Visibility',
  cnr: 'CNR',
  'edge.width': 'Edge width',
  'bars.contrast': 'Bar contrast',
  scale: 'Scale',
  'width.gated': 'Width, gated',
  'width.ungated': 'Width, ungated',
  'width.ratio': 'Width ratio',
  efficiency: 'Efficiency',
};

const PLACES = new Set(['x', 'y', 'xy', 'signal', 'idler', 'bucket', 'array', 'near', 'far']);
const WAYS: Record<string, string> = { fit: 'fit', moment: 'moments' };

export type Variant = 'raw' | 'net';

export const VARIANT_WORDS: Record<Variant, string> = { raw: 'raw', net: 'accidentals subtracted' };

export const LEVEL_WORDS: Record<VerdictLevel, string> = {
  violated: 'violated',
  indicated: 'indicated',
  inconclusive: 'inconclusive',
  'not-violated': 'not violated',
};

export interface SplitId {
  base: string;
  variant: Variant | null;
}

/** "reid.x.net" and "joint.x.raw.near" alike: the part raw or net may stand before the acquisition's name. */
export function splitVariant(id: string): SplitId {
  const parts = id.split('.');
  const at = parts.findLastIndex((part) => part === 'raw' || part === 'net');
  if (at < 1) return { base: id, variant: null };
  const variant = parts[at] === 'raw' ? 'raw' : 'net';
  return { base: parts.filter((_, i) => i !== at).join('.'), variant };
}

/** Ids the page does not know are shown as they are, spelled out; nothing is hidden. */
export function quantityLabel(id: string): string {
  const parts = splitVariant(id).base.split('.');
  const places = parts.filter((part) => PLACES.has(part));
  const ways = parts.flatMap((part) => WAYS[part] ?? []);
  const rest = parts.filter((part) => !PLACES.has(part) && WAYS[part] === undefined);
  const known = WHAT[rest.join('.')];
  const what = known ?? sentenceCase(rest.join(' ').replaceAll('-', ' '));
  const tail = [...places, ...ways].join(', ');
  return tail === '' ? what : `${what}, ${tail}`;
}

function sentenceCase(text: string): string {
  return text === '' ? text : text[0]!.toUpperCase() + text.slice(1);
}

export interface QuantityRow<T> {
  base: string;
  label: string;
  raw: T | null;
  net: T | null;
  /** Quantities that know no raw and net. */
  only: T | null;
}

/** One row a quantity, raw and net side by side, in the order the study gave. */
export function pairVariants<T>(entries: Record<string, T>): QuantityRow<T>[] {
  const rows = new Map<string, QuantityRow<T>>();
  for (const [id, value] of Object.entries(entries)) {
    const { base, variant } = splitVariant(id);
    const row = rows.get(base) ?? { base, label: quantityLabel(base), raw: null, net: null, only: null };
    if (variant === null) row.only = value;
    else row[variant] = value;
    rows.set(base, row);
  }
  return [...rows.values()];
}
