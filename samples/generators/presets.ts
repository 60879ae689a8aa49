import type { Detector } from '../../shared/contracts/detector';
import type { Layout, RecordsLayout } from '../../shared/contracts/layout';
import type { Plane } from '../../shared/contracts/plane';
import { type Preset, presetSchema } from '../../shared/contracts/preset';
import type { StudyId } from '../../shared/contracts/study';
import {
  ARRAY_PITCH_UM,
  ARRAY_SIDE,
  BUCKET_CHANNEL,
  CAMERA_PITCH_UM,
  HOT_IDLER_PIXEL,
  IDLER_CHANNEL,
  SIGNAL_CHANNEL,
  TICK_FS,
} from './bench';

export interface SamplePreset {
  file: string;
  preset: Preset;
  /** Input name -> sample file. */
  files: Record<string, string>;
}

const near: Plane = { version: 1, kind: 'near', magnification: { value: 4, sigma: 0.04 } };
const far: Plane = {
  version: 1,
  kind: 'far',
  focalLengthMm: { value: 22, sigma: 0.2 },
  signalNm: { value: 810, sigma: 0.5 },
  idlerNm: { value: 810, sigma: 0.5 },
};

const tags: Layout = {
  version: 1,
  format: 'hdf5',
  kind: 'tags',
  time: { dataset: '/tags/time' },
  channel: { dataset: '/tags/channel' },
  tickFs: TICK_FS,
};
const frames: Layout = { version: 1, format: 'hdf5', kind: 'frames', dataset: '/camera/frames' };

const pixels = { width: ARRAY_SIDE, height: ARRAY_SIDE, pitchUm: ARRAY_PITCH_UM };
const idler = { ...pixels, firstChannel: IDLER_CHANNEL, maskedPixels: [HOT_IDLER_PIXEL] };
const arrays = { version: 1, kind: 'tags', signal: { ...pixels, firstChannel: SIGNAL_CHANNEL }, idler };
const withBucket = { version: 1, kind: 'tags', idler, bucket: { channel: BUCKET_CHANNEL } };
const camera: Detector = { version: 1, kind: 'frames', pitchUm: CAMERA_PITCH_UM, maskedPixels: [] };

interface Input {
  file: string;
  layout: Layout;
  detector: unknown;
  plane: Plane | null;
}

function preset(file: string, name: string, study: StudyId, inputs: Record<string, Input>): SamplePreset {
  const settings = Object.entries(inputs).map(([input, { layout, detector, plane }]) => [
    input,
    { layout, detector, plane },
  ]);
  return {
    file,
    preset: presetSchema.parse({
      gemel: 1,
      kind: 'preset',
      name: `Lanternfield: ${name}`,
      study,
      inputs: Object.fromEntries(settings),
    }),
    files: Object.fromEntries(Object.entries(inputs).map(([input, { file: source }]) => [input, source])),
  };
}

/** One preset or more for every sample file. */
export function samplePresets(records: RecordsLayout): SamplePreset[] {
  const nearTags = { file: 'near-tags.h5', layout: tags, detector: arrays, plane: near };
  const farTags = { file: 'far-tags.h5', layout: tags, detector: arrays, plane: far };
  const nearFrames = { file: 'near-frames.h5', layout: frames, detector: camera, plane: near };
  const farFrames = { file: 'far-frames.h5', layout: frames, detector: camera, plane: far };
  const nearRecords = { file: 'near-tags.bin', layout: records, detector: arrays, plane: near };
  const ghostTags = { file: 'ghost-tags.h5', layout: tags, detector: withBucket, plane: near };
  return [
    preset('delay-near.json', 'delay, near field', 'delay', { tags: nearTags }),
    preset('delay-near-records.json', 'delay, near field from records', 'delay', { tags: nearRecords }),
    preset('joint-map-near.json', 'joint map, near field', 'joint-map', { data: nearTags }),
    preset('joint-map-frames.json', 'joint map, far field from frames', 'joint-map', { data: farFrames }),
    preset('witness-tags.json', 'witness from tags', 'witness', { near: nearTags, far: farTags }),
    preset('witness-frames.json', 'witness from frames', 'witness', { near: nearFrames, far: farFrames }),
    preset('ghost-image.json', 'ghost image of the lantern stencil', 'ghost-image', { tags: ghostTags }),
  ];
}
