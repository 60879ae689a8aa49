import { readFile } from 'node:fs/promises';
import type { ArrayColumn, Layout, NpyFramesLayout, TextLayout } from '../../../shared/contracts/layout';
import type { FuzzSeed } from '../../support/fuzz-reader';
import { runPython, writePython } from './python';
import { recordsLayout, writeTags } from './record-writer';
import { makeFolder } from './sources';

const npyFrames: NpyFramesLayout = { version: 1, format: 'npy', kind: 'frames' };
const tiff: Layout = { version: 1, format: 'tiff', kind: 'frames' };

function npyTags(time: ArrayColumn, channel: ArrayColumn): Layout {
  return { version: 1, format: 'npy', kind: 'tags', time, channel, tickFs: 1000 };
}

/** Good files of NumPy and TIFF, each variant of storage once. */
export async function foreignSeeds(): Promise<{ npy: FuzzSeed[]; npz: FuzzSeed[]; tiff: FuzzSeed[] }> {
  const folder = await makeFolder();
  const seed = async (name: string, layout: Layout): Promise<FuzzSeed> => ({
    name,
    bytes: new Uint8Array(await readFile(folder.path(name))),
    layout,
  });
  try {
    await runPython('write-with-numpy.py', ['numpy'], folder.path(''));
    await runPython('write-with-tifffile.py', ['numpy', 'tifffile', 'PIL'], folder.path(''));
    const npy: [string, Layout][] = [
      ['fields-others.npy', npyTags({ field: 'when' }, { field: 'where' })],
      ['table-C-False-i8.npy', npyTags({ field: 1 }, { field: 0 })],
      ['table-F-True-f8.npy', npyTags({ field: 1 }, { field: 0 })],
      ['version-2.npy', npyTags({ field: 'zeit' }, { field: 'wo' })],
      ['frames-C-big-u8.npy', npyFrames],
      ['frames-F-little-f2.npy', npyFrames],
    ];
    const npz: [string, Layout][] = [
      ['stored.npz', npyTags({ array: 'photon_time' }, { array: 'pixel' })],
      ['deflated.npz', npyTags({ array: 'photon_time' }, { array: 'pixel' })],
      ['zip64.npz', npyTags({ array: 't' }, { array: 'c' })],
      ['deflated-fortran.npz', npyTags({ array: 'events', field: 0 }, { array: 'events', field: 1 })],
      ['frames-deflated.npz', { ...npyFrames, array: 'shots' }],
      ['frames-deflated-fortran.npz', { ...npyFrames, array: 'shots' }],
    ];
    const stacks = [
      'u2-little-classic.tif',
      'f4-big-bigtiff.tif',
      'u2-big-tiles-predictor2.tif',
      'strips-of-7-deflate.tif',
      'libtiff-small-u2-tiff_lzw-2.tif',
      'libtiff-small-f4-tiff_deflate-3.tif',
      'libtiff-small-u2-packbits-1.tif',
      'apart-many.tif',
      'described-images.tif',
    ];
    return {
      npy: await Promise.all(npy.map(([name, layout]) => seed(name, layout))),
      npz: await Promise.all(npz.map(([name, layout]) => seed(name, layout))),
      tiff: await Promise.all(stacks.map((name) => seed(name, tiff))),
    };
  } finally {
    await folder.remove();
  }
}

/** Good files of HDF5, of both kinds of file. */
export async function hdf5Seeds(): Promise<FuzzSeed[]> {
  const folder = await makeFolder();
  const tags = (time: string, channel: string): Layout => ({
    version: 1,
    format: 'hdf5',
    kind: 'tags',
    time: { dataset: time },
    channel: { dataset: channel },
    tickFs: 1000,
  });
  const frames = (dataset: string): Layout => ({ version: 1, format: 'hdf5', kind: 'frames', dataset });
  const files: [string, Layout][] = [
    ['small-earliest', tags('/t32', '/c16')],
    ['big-endian-latest', tags('/run/zeit', '/run/ort')],
    ['resizable-earliest', tags('/t', '/c')],
    ['frames-earliest', frames('/camera/shots')],
    ['frames-plain-latest', frames('/shots')],
  ];
  try {
    await writePython('write-with-h5py.py', ['h5py', 'numpy'], folder.path(''));
    return await Promise.all(
      files.map(async ([name, layout]) => ({
        name,
        bytes: new Uint8Array(await readFile(folder.path(name))),
        layout,
      })),
    );
  } finally {
    await folder.remove();
  }
}

/** Files of fixed-width records: a wrapping counter, and one with markers. */
export function recordSeeds(): FuzzSeed[] {
  const ticks = Array.from({ length: 3000 }, (_, i) => BigInt(i) * 700n);
  const channels = ticks.map((_, i) => (i * 37) % 60);
  const layouts = {
    wrap: recordsLayout({
      recordBytes: 4,
      time: { firstBit: 0, bits: 24 },
      channel: { firstBit: 24, bits: 8 },
      rollover: { in: 'wrap' },
    }),
    marker: recordsLayout({
      time: { firstBit: 0, bits: 47 },
      channel: { firstBit: 47, bits: 16 },
      rollover: {
        in: 'marker',
        when: [{ field: { firstBit: 63, bits: 1 }, equals: 1 }],
        advanceTick: 2 ** 47,
        wraps: 'time-field',
      },
    }),
  };
  return Object.entries(layouts).map(([name, layout]) => ({
    name,
    bytes: writeTags(layout, ticks, channels),
    layout,
  }));
}

/** Columns of text in every way they are cut: signs, marks, line ends, quotes, exponents, remarks. */
export function textSeeds(): FuzzSeed[] {
  const lines = (line: (i: number) => string, end: string): Uint8Array =>
    new TextEncoder().encode(Array.from({ length: 120 }, (_, i) => line(i) + end).join(''));
  const layout: TextLayout = {
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
  };
  return [
    { name: 'whole.csv', bytes: lines((i) => `${i * 1_234_567},${i % 9}`, '\n'), layout },
    {
      name: 'seconds.txt',
      bytes: lines((i) => (i % 40 === 0 ? '# pause' : `${i} ${86_399 + i / 1024}`), '\r\n'),
      layout: { ...layout, delimiter: 'space', timeColumn: 1, channelColumn: 0, timeUnitFs: 1e15 },
    },
    {
      name: 'sheet.csv',
      bytes: lines((i) => (i === 0 ? 'Zeit;Kanal' : `"${i * 12},5";"${i % 4}"`), '\r'),
      layout: { ...layout, delimiter: 'semicolon', decimal: 'comma', headerLines: 1, tickFs: 500 },
    },
    {
      name: 'floats.tsv',
      bytes: lines((i) => `${(i * 1.5e6).toExponential(18)}\t${(i % 3).toExponential(18)}`, '\n'),
      layout: { ...layout, delimiter: 'tab', tickFs: 81_000 },
    },
  ];
}
