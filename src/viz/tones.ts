import type { Tone } from './types';

/** The colour of a tone, following the theme. */
export function toneColour(tone: Tone | 'dim'): string {
  return `var(--color-${tone})`;
}
