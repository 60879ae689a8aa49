import type { Block } from '../../shared/contracts/blocks';
import { type Detector, detectorSchema } from '../../shared/contracts/detector';
import type { DialValues } from '../../shared/contracts/dial';
import type { Layout } from '../../shared/contracts/layout';
import type { StudyOutput } from '../../shared/contracts/output';
import type { Plane } from '../../shared/contracts/plane';
import type { ReaderFacts } from '../../shared/contracts/reader';
import type { Receiver, Scenario } from '../../shared/contracts/scenario';
import type { Tally, TallySpec } from '../../shared/contracts/tally';
import { createAccumulator } from '../../workers/accumulators/accumulator';
import { simulateFrames } from '../../workers/simulate/frames';
import { simulateTags } from '../../workers/simulate/tags';
import { fillDials } from '../../workers/studies/dials';
import type { CountedInput, Study, StudyInput } from '../../workers/studies/study';

/** A study over simulated acquisitions, by the steps of the engine: search, choose, count, finish. */
export function runScenarios(
  study: Study,
  scenarios: Record<string, Scenario>,
  given: DialValues = {},
): { output: StudyOutput; inputs: Record<string, CountedInput> } {
  const dials = fillDials(study.info, given);
  const blocks = Object.fromEntries(
    Object.entries(scenarios).map(([name, scenario]): [string, Block[]] => [name, blocksOf(scenario)]),
  );
  const described = Object.fromEntries(
    Object.entries(scenarios).map(([name, scenario]) => [name, describe(scenario, blocks[name] ?? [])]),
  );
  study.validate(described, dials);
  const inputs: Record<string, CountedInput> = {};
  for (const [name, input] of Object.entries(described)) {
    const data = blocks[name] ?? [];
    const search = study.searchSpec(input, dials);
    let chosen: CountedInput['chosen'] = {};
    if (search !== null) {
      const seen = count(search, data);
      if (seen.kind !== 'tags') throw new Error('a search counts tags');
      const found = study.choose(seen, input, dials);
      if (found === null) throw new Error(`no peak was found in ${name}`);
      chosen = found;
    }
    inputs[name] = { ...input, chosen, tally: count(study.spec(input, dials, chosen), data) };
  }
  return { output: study.finish({ inputs, dials, seed: 1, partial: false }), inputs };
}

function blocksOf(scenario: Scenario): Block[] {
  return scenario.kind === 'tags' ? [...simulateTags(scenario)] : [...simulateFrames(scenario)];
}

function count(spec: TallySpec, blocks: readonly Block[]): Tally {
  const accumulator = createAccumulator(spec);
  for (const block of blocks) accumulator.push(block);
  return accumulator.tally();
}

function describe(scenario: Scenario, blocks: readonly Block[]): StudyInput {
  const records = blocks.reduce((sum, block) => sum + block.count, 0);
  return {
    layout: layoutOf(scenario),
    detector: detectorOf(scenario),
    plane: planeOf(scenario),
    facts: factsOf(scenario, records),
  };
}

function factsOf(scenario: Scenario, records: number): ReaderFacts {
  if (scenario.kind === 'tags')
    return { kind: 'tags', records, tickFs: scenario.tickFs, reader: 'simulated' };
  const { width, height } = scenario.camera;
  return { kind: 'frames', frames: records, width, height, type: scenario.file.type, reader: 'simulated' };
}

function layoutOf(scenario: Scenario): Layout {
  if (scenario.kind === 'frames') {
    return { version: 1, format: 'hdf5', kind: 'frames', dataset: scenario.file.dataset };
  }
  return {
    version: 1,
    format: 'hdf5',
    kind: 'tags',
    time: { dataset: scenario.file.time },
    channel: { dataset: scenario.file.channel },
    tickFs: scenario.tickFs,
  };
}

function detectorOf(scenario: Scenario): Detector {
  if (scenario.kind === 'frames') {
    return detectorSchema.parse({ version: 1, kind: 'frames', pitchUm: scenario.camera.pitchUm });
  }
  const arm = (name: 'signal' | 'idler', receiver: Receiver): object =>
    receiver.kind === 'bucket'
      ? { bucket: { channel: receiver.channel } }
      : {
          [name]: {
            width: receiver.width,
            height: receiver.height,
            firstChannel: receiver.firstChannel,
            pitchUm: receiver.pitchUm,
            maskedPixels: [...receiver.deadPixels, ...receiver.hotPixels.map((hot) => hot.pixel)],
          },
        };
  return detectorSchema.parse({
    version: 1,
    kind: 'tags',
    ...arm('signal', scenario.signal),
    ...arm('idler', scenario.idler),
  });
}

/** The true calibration, without uncertainty: what is left is what counting makes of it. */
function planeOf({ optics, source }: Scenario): Plane {
  const exact = (value: number) => ({ value, sigma: 0 });
  if (optics.kind === 'near') return { version: 1, kind: 'near', magnification: exact(optics.magnification) };
  return {
    version: 1,
    kind: 'far',
    focalLengthMm: exact(optics.focalLengthMm),
    signalNm: exact(source.signalNm),
    idlerNm: exact(source.idlerNm),
  };
}
