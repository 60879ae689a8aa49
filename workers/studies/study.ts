import type { Detector } from '../../shared/contracts/detector';
import type { DialValues } from '../../shared/contracts/dial';
import type { Layout } from '../../shared/contracts/layout';
import type { StudyOutput } from '../../shared/contracts/output';
import type { Plane } from '../../shared/contracts/plane';
import type { ReaderFacts } from '../../shared/contracts/reader';
import type { StudyInfo } from '../../shared/contracts/study';
import type { TagSpec, TagTally, Tally, TallySpec } from '../../shared/contracts/tally';
import type { Estimate } from '../../shared/physics/estimate';

/** Clock of a second file against that of the first: t_main = t_companion (1 + drift) + offset, in ps. */
export interface ClockFacts {
  offset: Estimate;
  drift: Estimate;
  /** How well the line holds through the peaks it was found from; null where the clock was given, without errors. */
  line: {
    stretches: number;
    found: number;
    residualPs: number;
    chi2PerDof: number;
    peakSigmaPs: number;
  } | null;
}

/** What a study knows of an input before anything is counted. */
export interface StudyInput {
  layout: Layout;
  detector: Detector;
  plane: Plane | null;
  facts: ReaderFacts;
  /** Where tags of two clocks were merged. */
  clock?: ClockFacts;
}

/** Numbers the study chose for dials left to it (null), by dial id, in the dial's unit. */
export type Chosen = Record<string, number>;

export interface CountedInput extends StudyInput {
  tally: Tally;
  chosen: Chosen;
}

export interface FinishRequest {
  /** Complete unless `partial`: then inputs not yet begun are missing, and the others are half counted. */
  inputs: Partial<Record<string, CountedInput>>;
  /** Every dial of the study, defaults filled in; null where the study chooses. */
  dials: DialValues;
  seed: number;
  /** A look while reading: cheap (few resamples), same ids. */
  partial: boolean;
}

/**
 * One kind of analysis: says what to count (specs) and turns counts into quantities, maps and checks (finish). Pure:
 * no file, no worker, no clock. For tag inputs the engine makes a search pass (histogram only, over the first records,
 * then over all of them when nothing stands out) whenever `searchSpec` is not null, and hands its tally to `choose`.
 */
export interface Study {
  readonly info: StudyInfo;
  /** Throws a Problem (`missing-input`, `bad-detector`, `bad-plane`, `bad-dial`) before any byte is counted. */
  validate(inputs: Record<string, StudyInput>, dials: DialValues): void;
  /** null when nothing has to be searched: frames, or delay and window both set. */
  searchSpec(input: StudyInput, dials: DialValues): TagSpec | null;
  /** null: no peak stands out in this tally; the engine reads more, and at the end uses `chooseBlind`. */
  choose(tally: TagTally, input: StudyInput, dials: DialValues): Chosen | null;
  /** What to use when no peak stands out anywhere: the study then fails its check "peak-found". */
  chooseBlind(input: StudyInput, dials: DialValues): Chosen;
  spec(input: StudyInput, dials: DialValues, chosen: Chosen): TallySpec;
  finish(request: FinishRequest): StudyOutput;
}
