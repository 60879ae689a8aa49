/** What was found of one row. */
export interface Finding {
  name: string;
  kernel: string;
  rate: number;
  unit: string;
  ratioNumpy: number | null;
  ratioCpp: number | null;
  peakMB: number | null;
  growth: number | null;
}
