import { z } from '../util/zod';

/**
 * What to simulate: a pair source, the optics of one plane, the detectors, the length of the run and the file to write.
 * Version 1. Calibrations are the true ones; a preset that analyses the file carries its own, with uncertainties.
 */

const probability = z.number().min(0).max(0.5);
const perSecond = z.number().min(0).max(1e9);

/** Collinear degenerate or two-colour pairs from a crystal pumped by a Gaussian beam. */
export const pairSourceSchema = z
  .strictObject({
    pumpNm: z.number().min(200).max(2000),
    /** 1/e^2 intensity radius of the pump in the crystal. */
    pumpWaistUm: z.number().positive().max(1e5),
    crystalMm: z.number().positive().max(1000),
    pumpIndex: z.number().min(1).max(5),
    /** Gaussian stand-in for the phase-matching sinc; 0.455 matches at 1/e^2 of the intensity. */
    alpha: z.number().positive().max(10).default(0.455),
    signalNm: z.number().min(200).max(20000),
    idlerNm: z.number().min(200).max(20000),
  })
  .refine((s) => Math.abs(s.pumpNm / s.signalNm + s.pumpNm / s.idlerNm - 1) < 0.005, {
    error:
      'the wavelengths do not share the pump energy: 1/pumpNm must be 1/signalNm + 1/idlerNm within 0.5 %',
    path: ['idlerNm'],
  });
export type PairSource = z.infer<typeof pairSourceSchema>;

/** Crystal imaged on the detectors, or its far field brought there by a lens. */
export const opticsSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('near'), magnification: z.number().positive().max(1e4) }),
  z.strictObject({ kind: z.literal('far'), focalLengthMm: z.number().positive().max(1e5) }),
]);
export type Optics = z.infer<typeof opticsSchema>;

const afterpulseSchema = z.strictObject({
  probability,
  /** Mean of the exponential delay after the dead time. */
  meanNs: z.number().positive().max(1e6),
});

const timing = {
  /** Optics and detector together: chance that a photon arriving on an active area is seen. */
  efficiency: z.number().min(0).max(1),
  /** Gaussian sigma of the arrival stamp. */
  jitterPs: z.number().min(0).max(1e7).default(0),
  /** Cable: added to every tag of the arm. */
  delayPs: z.number().min(-1e8).max(1e8).default(0),
  /** Non-paralysable, per pixel. */
  deadTimeNs: z.number().min(0).max(1e6).default(0),
  afterpulse: afterpulseSchema.optional(),
};

export const pixelArraySchema = z.strictObject({
  kind: z.literal('array'),
  ...timing,
  width: z.int().min(1).max(256),
  height: z.int().min(1).max(256),
  pitchUm: z.number().positive().max(1e5),
  firstChannel: z.int().min(0).max(65535),
  /** Active share of a pixel's area, a centred square. */
  fill: z.number().positive().max(1).default(1),
  /** Where the optical axis meets the array, from its centre. */
  axisUm: z.tuple([z.number(), z.number()]).default([0, 0]),
  /** Per pixel. */
  darksPerSecond: perSecond.default(0),
  /** Stray single photons seen by the whole array, spread evenly. */
  backgroundPerSecond: perSecond.default(0),
  /** Gaussian sigma of fixed per-pixel delays. */
  skewPs: z.number().min(0).max(1e7).default(0),
  /** Chance that a click fires one of the four neighbours. */
  crosstalk: probability.default(0),
  /** Pixels that never fire, as y * width + x. */
  deadPixels: z.array(z.int().min(0)).max(65536).default([]),
  /** Pixels with extra dark counts. */
  hotPixels: z
    .array(z.strictObject({ pixel: z.int().min(0), perSecond }))
    .max(1000)
    .default([]),
});
export type PixelArray = z.infer<typeof pixelArraySchema>;

/** A detector without resolution behind a stencil: cells of `#` (closed) and `.` (open), centred on the axis. */
export const bucketSchema = z.strictObject({
  kind: z.literal('bucket'),
  ...timing,
  channel: z.int().min(0).max(65535),
  stencil: z.strictObject({
    cellUm: z.number().positive().max(1e5),
    rows: z
      .array(z.string().regex(/^[#.]+$/, 'a row is made of # and .'))
      .min(1)
      .max(256)
      .refine((rows) => rows.every((row) => row.length === rows[0]?.length), 'all rows must be equally long'),
  }),
  darksPerSecond: perSecond.default(0),
  backgroundPerSecond: perSecond.default(0),
});

const receiverSchema = z.discriminatedUnion('kind', [pixelArraySchema, bucketSchema]);
export type Receiver = z.infer<typeof receiverSchema>;

const heading = {
  version: z.literal(1),
  name: z.string().min(1).max(200),
  seed: z.int().min(0).max(4294967295),
  source: pairSourceSchema,
  optics: opticsSchema,
  /** Linear change of the pair rate over the run, relative to its mean; 0.1 is from 95 % to 105 %. */
  drift: z.number().min(-1.9).max(1.9).default(0),
};

/** `classic` is what every HDF5 reader understands; `recent` uses the chunk index of HDF5 1.10. */
const hdf5Structure = z.enum(['classic', 'recent']).default('classic');
const gzip = z.int().min(0).max(9).default(6);
const datasetPath = z.string().regex(/^(\/[^/]+)+$/, 'a dataset path starts with / and names every group');

const tagFieldsSchema = z.strictObject({
  ...heading,
  kind: z.literal('tags'),
  seconds: z.number().positive().max(1e6),
  tickFs: z.int().min(1).max(1e12),
  pairsPerSecond: perSecond,
  signal: receiverSchema,
  idler: receiverSchema,
  file: z
    .strictObject({
      time: datasetPath.default('/tags/time'),
      channel: datasetPath.default('/tags/channel'),
      structure: hdf5Structure,
      gzip,
      /** Record files: 4 bytes with rollover markers (channels below 1024), or 8 bytes that wrap after 2^48 ticks. */
      recordBytes: z.union([z.literal(4), z.literal(8)]).default(8),
    })
    .prefault({}),
});
export type TagScenario = z.infer<typeof tagFieldsSchema>;

const readoutSchema = z.discriminatedUnion('kind', [
  /** 1 where charge plus noise passes the threshold (electrons). */
  z.strictObject({
    kind: z.literal('clicks'),
    readNoise: z.number().min(0).max(1000).default(0),
    threshold: z.number().positive().max(1e5).default(0.5),
  }),
  /** offset + gain * (charge + noise), rounded and clipped to the file's type. */
  z.strictObject({
    kind: z.literal('counts'),
    readNoise: z.number().min(0).max(1000).default(0),
    offset: z.number().min(0).max(60000).default(0),
    gain: z.number().positive().max(10000).default(1),
  }),
]);

/** Both arms fall on the same camera. */
const frameFieldsSchema = z.strictObject({
  ...heading,
  kind: z.literal('frames'),
  frames: z.int().min(1).max(1e8),
  pairsPerFrame: z.number().min(0).max(1e6),
  camera: z.strictObject({
    width: z.int().min(2).max(2048),
    height: z.int().min(2).max(2048),
    pitchUm: z.number().positive().max(1e5),
    fill: z.number().positive().max(1).default(1),
    axisUm: z.tuple([z.number(), z.number()]).default([0, 0]),
    signalEfficiency: z.number().min(0).max(1),
    idlerEfficiency: z.number().min(0).max(1),
    /** Dark and stray electrons per pixel and frame. */
    darksPerPixel: z.number().min(0).max(1000).default(0),
    /** Chance that an electron leaves a second one in one of the four neighbours. */
    smear: probability.default(0),
    readout: readoutSchema,
  }),
  file: z
    .strictObject({
      dataset: datasetPath.default('/camera/frames'),
      type: z.enum(['uint8', 'uint16']).default('uint8'),
      structure: hdf5Structure,
      gzip,
    })
    .prefault({}),
});
export type FrameScenario = z.infer<typeof frameFieldsSchema>;

/** Channels a receiver occupies, first and last. */
export function channelsOf(receiver: Receiver): [number, number] {
  return receiver.kind === 'bucket'
    ? [receiver.channel, receiver.channel]
    : [receiver.firstChannel, receiver.firstChannel + receiver.width * receiver.height - 1];
}

/** What the fields must fulfil together: a sentence and the field to correct, or null. */
function faultOf(scenario: TagScenario | FrameScenario): { message: string; path: string[] } | null {
  if (scenario.kind === 'frames') {
    const { readout } = scenario.camera;
    const top = scenario.file.type === 'uint8' ? 255 : 65535;
    if (readout.kind !== 'counts' || readout.offset + readout.gain <= top) return null;
    const message = `offset plus gain is ${readout.offset + readout.gain}, more than ${scenario.file.type} holds (${top})`;
    return { message, path: ['camera', 'readout'] };
  }
  for (const arm of ['signal', 'idler'] as const) {
    const receiver = scenario[arm];
    const last = channelsOf(receiver)[1];
    if (last > 65535)
      return { message: `channels end at 65535, this array would reach ${last}`, path: [arm] };
    if (receiver.kind === 'bucket') continue;
    const pixels = receiver.width * receiver.height;
    const named = [...receiver.deadPixels, ...receiver.hotPixels.map((hot) => hot.pixel)];
    const outside = named.find((pixel) => pixel >= pixels);
    if (outside !== undefined)
      return { message: `pixels go from 0 to ${pixels - 1}, found ${outside}`, path: [arm] };
  }
  const [signal, idler] = [channelsOf(scenario.signal), channelsOf(scenario.idler)];
  if (signal[0] > idler[1] || idler[0] > signal[1]) return null;
  const message = `its channels ${idler.join('-')} overlap those of the signal arm, ${signal.join('-')}`;
  return { message, path: ['idler'] };
}

export const scenarioSchema = z
  .discriminatedUnion('kind', [tagFieldsSchema, frameFieldsSchema])
  .superRefine((scenario, context) => {
    const fault = faultOf(scenario);
    if (fault !== null) context.addIssue({ code: 'custom', ...fault });
  });
export type Scenario = z.infer<typeof scenarioSchema>;
