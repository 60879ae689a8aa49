import type { MapData } from '../../../shared/contracts/output';
import { splitVariant, type Variant } from './quantity-words';

export type CellKind = 'histogram' | 'rates' | 'projection' | 'line' | 'joint' | 'image' | 'map';

export interface Cell {
  id: string;
  map: MapData;
  kind: CellKind;
}

export interface Section {
  id: string;
  /** Wide cells take the whole row. */
  wide: boolean;
  cells: Cell[];
}

function kindOf(id: string, map: MapData): CellKind {
  if (map.shape.length === 1) {
    if (id.startsWith('delay.histogram')) return 'histogram';
    if (id.startsWith('rates')) return 'rates';
    if (id.startsWith('minus') || id.startsWith('plus')) return 'projection';
    return 'line';
  }
  if (id.startsWith('joint.')) return 'joint';
  return id.startsWith('image') || id === 'mean.frame' ? 'image' : 'map';
}

interface Rule {
  id: string;
  takes: RegExp;
  wide?: boolean;
}

const joint = (axis: 'x' | 'y'): Rule[] => [
  { id: `joint-${axis}`, takes: new RegExp(`^joint\\.${axis}\\.`) },
  // The pair that makes the witness first: position difference, momentum sum.
  { id: `width-${axis}`, takes: new RegExp(`^(minus\\.${axis}\\.near|plus\\.${axis}\\.far)`) },
];

/** What belongs together, from the top. Maps no rule takes come last, so nothing is lost. */
const RULES: Record<string, readonly Rule[]> = {
  delay: [
    { id: 'histogram', takes: /^delay\.histogram/, wide: true },
    { id: 'rates', takes: /^rates/ },
    { id: 'singles', takes: /^singles/ },
  ],
  'joint-map': [
    { id: 'joint', takes: /^joint\.[xy](\.|$)/ },
    { id: 'projections-x', takes: /^(minus|plus)\.x/ },
    { id: 'projections-y', takes: /^(minus|plus)\.y/ },
    { id: 'coordinates', takes: /^(difference|sum)/ },
    { id: 'histogram', takes: /^delay\.histogram/, wide: true },
    { id: 'singles', takes: /^singles/ },
  ],
  witness: [
    ...joint('x'),
    ...joint('y'),
    { id: 'coordinates', takes: /^(difference|sum)/ },
    { id: 'projections', takes: /^(minus|plus)/ },
    { id: 'histogram', takes: /^delay\.histogram/ },
    { id: 'singles', takes: /^singles/ },
  ],
  'ghost-image': [
    { id: 'image', takes: /^image/ },
    { id: 'histogram', takes: /^delay\.histogram/, wide: true },
    { id: 'singles', takes: /^singles/ },
  ],
};

export function hasVariants(maps: Record<string, MapData>): boolean {
  return Object.keys(maps).some((id) => splitVariant(id).variant !== null);
}

/** Of maps that come raw and net, the wanted one; a map that knows no such difference is always shown. */
function isWanted(id: string, all: ReadonlySet<string>, variant: Variant): boolean {
  const { base, variant: own } = splitVariant(id);
  const isThere = all.has(`${base} ${variant}`);
  if (own === null) return !isThere;
  return own === variant || !(isThere || all.has(`${base} null`));
}

export function arrangeMaps(study: string, maps: Record<string, MapData>, variant: Variant): Section[] {
  const all = new Set(
    Object.keys(maps).map((id) => {
      const { base, variant: own } = splitVariant(id);
      return `${base} ${own}`;
    }),
  );
  const left = new Map(Object.entries(maps).filter(([id]) => isWanted(id, all, variant)));
  const sections: Section[] = [];
  const take = (id: string, matches: (mapId: string) => boolean, wide: boolean): void => {
    const cells: Cell[] = [];
    for (const [mapId, map] of [...left]) {
      if (!matches(mapId)) continue;
      cells.push({ id: mapId, map, kind: kindOf(mapId, map) });
      left.delete(mapId);
    }
    if (cells.length > 0) sections.push({ id, wide: wide && cells.length === 1, cells });
  };
  for (const { id, takes, wide = false } of RULES[study] ?? []) take(id, (mapId) => takes.test(mapId), wide);
  take('others', (id) => maps[id]!.shape.length === 2, false);
  take('other-lines', () => true, false);
  return sections;
}
