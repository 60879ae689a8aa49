import { type TextLayout, textLayoutSchema } from '../../../shared/contracts/layout';

export const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);

/** Time and channel between commas, no header, ticks of 1 ps; `parts` says what is different. */
export function textLayout(parts: Partial<TextLayout> = {}): TextLayout {
  return textLayoutSchema.parse({
    version: 1,
    format: 'text',
    kind: 'tags',
    delimiter: 'comma',
    decimal: 'point',
    headerLines: 0,
    timeColumn: 0,
    channelColumn: 1,
    timeUnitFs: 1000,
    tickFs: 1000,
    ...parts,
  });
}
