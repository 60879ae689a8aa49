import type { TagBlock } from '../../shared/contracts/blocks';
import type { TagDetector } from '../../shared/contracts/detector';
import type { DialValues } from '../../shared/contracts/dial';
import type { StudyOutput } from '../../shared/contracts/output';
import type { TagTally } from '../../shared/contracts/tally';
import { createTagAccumulator } from '../../workers/accumulators/tag-accumulator';
import { fillDials } from '../../workers/studies/dials';
import type { Chosen, Study, StudyInput } from '../../workers/studies/study';

export interface StudyRun {
  output: StudyOutput;
  tally: TagTally;
  chosen: Chosen;
  /** Once more from the same counts, with other dials that need no bytes. */
  finish(given: DialValues): StudyOutput;
}

/** A study over one block of tags, by the same steps as the engine: search, choose, count, finish. */
export function runTagStudy(
  study: Study,
  block: TagBlock,
  detector: TagDetector,
  given: DialValues = {},
  tickFs = 1000,
): StudyRun {
  const input = tagInput(detector, block.count, tickFs);
  const name = study.info.inputs[0]!.name;
  const dials = fillDials(study.info, given);
  study.validate({ [name]: input }, dials);
  const search = study.searchSpec(input, dials);
  let chosen: Chosen = {};
  if (search !== null) {
    const seen = createTagAccumulator(search);
    seen.push(block);
    chosen = study.choose(seen.tally(), input, dials) ?? study.chooseBlind(input, dials);
  }
  const spec = study.spec(input, dials, chosen);
  if (spec.kind !== 'tags') throw new Error('a specification for tags was expected');
  const counted = createTagAccumulator(spec);
  counted.push(block);
  const tally = counted.tally();
  const inputs = { [name]: { ...input, tally, chosen } };
  const finish = (again: DialValues): StudyOutput =>
    study.finish({ inputs, dials: fillDials(study.info, again), seed: 1, partial: false });
  return { output: finish(given), tally, chosen, finish };
}

export function tagInput(detector: TagDetector, records: number, tickFs: number): StudyInput {
  return {
    layout: {
      version: 1,
      format: 'hdf5',
      kind: 'tags',
      time: { dataset: 'time' },
      channel: { dataset: 'channel' },
      tickFs,
    },
    detector,
    plane: null,
    facts: { kind: 'tags', records, tickFs, reader: 'test' },
  };
}

export function arrayMap(width: number, height: number, firstChannel: number) {
  return {
    width,
    height,
    firstChannel,
    order: 'rows' as const,
    flipX: false,
    flipY: false,
    pitchUm: 50,
    maskedPixels: [],
    delayPs: 0,
    pixelDelayPs: [],
  };
}
