import type { ArrayMap, Detector } from '../../../shared/contracts/detector';
import type { DialSpec, DialValue } from '../../../shared/contracts/dial';
import type { Plane } from '../../../shared/contracts/plane';
import type { InputSetting, Preset } from '../../../shared/contracts/preset';
import { type InputSpec, type StudyInfo, studyIds } from '../../../shared/contracts/study';
import { Problem } from '../../../shared/errors/problem';
import { studies } from '../../studies/registry';
import { readArguments, requireOne } from './arguments';
import type { Console } from './console';

export const studiesUsage = 'studies';
export const templateUsage = 'template STUDY';

/** Every study with its inputs and dials. */
export async function listStudies(args: readonly string[], out: Console): Promise<number> {
  readArguments(args, {}, studiesUsage);
  await out.json({ studies: Object.values(studies).map((study) => study.info) });
  return 0;
}

/** A preset to edit, on stdout. */
export async function template(args: readonly string[], out: Console): Promise<number> {
  const { positionals } = readArguments(args, {}, templateUsage);
  const name = requireOne(positionals, 'study', templateUsage);
  const id = studyIds.find((known) => known === name);
  if (id === undefined) {
    throw new Problem(
      'bad-input',
      `There is no study "${name}"; choose one of ${studyIds.join(', ')}.`,
      name,
    );
  }
  await out.json(buildTemplate(studies[id].info));
  return 0;
}

export function buildTemplate(info: StudyInfo): Preset {
  return {
    gemel: 1,
    kind: 'preset',
    name: `${info.label}: give it a name`,
    study: info.id,
    dials: Object.fromEntries(info.dials.map((dial) => [dial.id, defaultOf(dial)])),
    inputs: Object.fromEntries(info.inputs.map((input) => [input.name, settingOf(input)])),
  };
}

function defaultOf(dial: DialSpec): DialValue {
  return dial.default;
}

/** Placeholders a person replaces: two 16 x 16 arrays numbered one after the other, then a bucket. */
function settingOf(input: InputSpec): InputSetting {
  return { layout: null, detector: detectorOf(input), plane: planeOf(input) };
}

function detectorOf(input: InputSpec): Detector {
  if (!input.accepts.includes('tags')) {
    return { version: 1, kind: 'frames', pitchUm: 16, maskedPixels: [] };
  }
  const arrays: { signal?: ArrayMap; idler?: ArrayMap } = {};
  let nextChannel = 0;
  for (const arm of ['signal', 'idler'] as const) {
    if (!input.arms.includes(arm)) continue;
    arrays[arm] = arrayAt(nextChannel);
    nextChannel += 256;
  }
  const bucket = input.arms.includes('bucket') ? { bucket: { channel: nextChannel, delayPs: 0 } } : {};
  return { version: 1, kind: 'tags', ...arrays, ...bucket };
}

function arrayAt(firstChannel: number): ArrayMap {
  return {
    width: 16,
    height: 16,
    firstChannel,
    order: 'rows',
    flipX: false,
    flipY: false,
    pitchUm: 50,
    maskedPixels: [],
    delayPs: 0,
    pixelDelayPs: [],
  };
}

function planeOf(input: InputSpec): Plane | null {
  if (input.plane === 'none') return null;
  if (input.plane === 'far') {
    return {
      version: 1,
      kind: 'far',
      focalLengthMm: { value: 100, sigma: 1 },
      signalNm: { value: 810, sigma: 0 },
      idlerNm: { value: 810, sigma: 0 },
    };
  }
  return { version: 1, kind: 'near', magnification: { value: 1, sigma: 0.01 } };
}
