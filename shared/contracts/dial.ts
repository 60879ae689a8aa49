import { z } from '../util/zod';

/** Rectangle of pixels, both ends included. */
export const regionSchema = z.strictObject({
  x0: z.int().min(0),
  y0: z.int().min(0),
  x1: z.int().min(0),
  y1: z.int().min(0),
});
export type Region = z.infer<typeof regionSchema>;

/** `null` means: let the study choose (dials with `auto`) or not set (regions). */
export const dialValueSchema = z.union([z.number(), z.string(), regionSchema, z.null()]);
export type DialValue = z.infer<typeof dialValueSchema>;
export type DialValues = Record<string, DialValue>;

interface DialBase {
  id: string;
  label: string;
  /** One line: what it does and why one would turn it. */
  reason: string;
  /**
   * `bytes`: turning it reads the file again; `pairs`: only where the pairs of the last run were not kept; `finish`: never.
   */
  needs: 'bytes' | 'pairs' | 'finish';
  /** Kind of input it concerns; left out where it concerns any. */
  for?: 'tags' | 'frames';
}

export type DialSpec = DialBase &
  (
    | {
        type: 'number' | 'integer';
        unit: string;
        /** null only where `auto` is true. */
        default: number | null;
        min: number;
        max: number;
        step: number;
        auto: boolean;
      }
    | { type: 'choice'; options: readonly { value: string; label: string }[]; default: string }
    | { type: 'region'; default: null }
  );
