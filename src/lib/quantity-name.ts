/** Names of quantities by the longest beginning of their id; what follows is said after it. */
const NAMES: Record<string, string> = {
  'accidentals.product': 'Accidentals from singles',
  'accidentals.shifted': 'Accidentals from shifted windows',
  'accidentals.sideband': 'Accidentals from sidebands',
  'bars.contrast': 'Bar contrast',
  car: 'CAR',
  'clock.drift': 'Clock drift',
  'clock.offset': 'Clock offset',
  cnr: 'CNR',
  coincidences: 'Coincidences',
  'delay.peak': 'Delay peak',
  'delay.sigma': 'Delay width',
  duan: 'Duan-Simon sum',
  'edge.width': 'Edge width',
  efficiency: 'Efficiency',
  'entropic.separability': 'Entropic separability',
  'entropic.steering': 'Entropic steering',
  fedorov: 'Fedorov ratio',
  'g2.heralded': 'Heralded g2(0)',
  'g2.peak': 'g2 at the peak',
  heralding: 'Heralding efficiency',
  mancini: 'Mancini product',
  'modes.fidelity': 'Mode fidelity',
  'modes.schmidt': 'Schmidt number from modes',
  reid: 'Reid product',
  scale: 'Scale',
  schmidt: 'Schmidt number',
  singles: 'Singles',
  visibility: 'Visibility',
  width: 'Width',
  'width.gated': 'Gated width',
  'width.ratio': 'Width ratio',
  'width.ungated': 'Ungated width',
  'window.width': 'Coincidence window',
};

const PARTS: Record<string, string> = {
  raw: 'raw',
  net: 'accidentals removed',
  minus: 'difference',
  plus: 'sum',
  xy: 'x and y',
  fit: 'by fit',
  moment: 'by moments',
};

/** "reid.x.net" -> "Reid product, x, accidentals removed"; an id of a newer version is shown as it is. */
export function quantityName(id: string): string {
  const parts = id.split('.');
  for (let length = parts.length; length > 0; length--) {
    const name = NAMES[parts.slice(0, length).join('.')];
    if (name === undefined) continue;
    return [name, ...parts.slice(length).map((part) => PARTS[part] ?? part)].join(', ');
  }
  return id;
}
