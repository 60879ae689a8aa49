/** What a key does on a focused map. */
export type MapAction =
  | { kind: 'move'; dx: number; dy: number }
  | { kind: 'act' }
  | { kind: 'zoom'; factor: number }
  | { kind: 'reset' }
  | { kind: 'leave' };

const ARROWS: Record<string, readonly [number, number]> = {
  ArrowLeft: [-1, 0],
  ArrowRight: [1, 0],
  ArrowUp: [0, 1],
  ArrowDown: [0, -1],
};

const ZOOM_KEY_FACTOR = 1.25;

export function readMapKey(key: string, shift: boolean): MapAction | null {
  const arrow = ARROWS[key];
  if (arrow) {
    const stride = shift ? 10 : 1;
    return { kind: 'move', dx: arrow[0] * stride, dy: arrow[1] * stride };
  }
  if (key === 'Enter' || key === ' ') return { kind: 'act' };
  if (key === '+' || key === '=') return { kind: 'zoom', factor: 1 / ZOOM_KEY_FACTOR };
  if (key === '-') return { kind: 'zoom', factor: ZOOM_KEY_FACTOR };
  if (key === '0') return { kind: 'reset' };
  if (key === 'Escape') return { kind: 'leave' };
  return null;
}
