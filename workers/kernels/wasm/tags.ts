// Tag kernels in AssemblyScript. Each is the twin of a readable function of the same name in workers/kernels, which
// stays as reference and fallback. Arguments are byte addresses in the caller's memory (see ../wasm-module.ts).

export {
  decodeAny,
  decodeEight,
  decodeEightBig,
  decodeEightHigh,
  decodeFour,
  decodeFourBig,
} from './tags-decode';
export { countTriples, histogramLists, imageLists, matrixLists } from './tags-lists';
export {
  countBuckets,
  countPairs,
  countSites,
  scanBetween,
  scanPairs,
  toBuckets,
  toColumns,
} from './tags-pairs';
export { matrixMerged, scanTags } from './tags-scan';
export { countBelow, dropDead, isSorted, orderOf, sortTags, takeTags } from './tags-take';
