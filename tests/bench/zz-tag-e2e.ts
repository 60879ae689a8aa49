import { createAccumulator } from '/work/main/workers/accumulators/accumulator';
import { loadKernels } from '/work/main/workers/pipeline/kernels';
import { compileKernels } from '/work/main/workers/pipeline/kernels-node';
import { createRecordDecoding } from '/work/main/workers/kernels/tag-decode';
import { openPathSource } from '/work/main/workers/pipeline/node-source';
import { openRecords } from '/work/main/workers/formats/records/reader';
import { armSpec } from '/work/main/tests/unit/workers/accumulators/tag-twin';
const path = process.argv[2] ?? '/tmp/tagk/pairs8.bin';
const never = { cancelled: false };
const layout: any = { version:1, format:'records', kind:'tags', recordBytes:8, byteOrder:'little', headerBytes:0, time:{firstBit:0,bits:48}, channel:{firstBit:48,bits:16}, rollover: process.env.WRAP ? {in:'wrap'} : {in:'none'}, skip:[], tickFs:1000 };
const spec = (window: any, hist: any, keep?: any): any => ({ kind:'tags', tickFs:1000, a: armSpec(8,8,0), b: armSpec(8,8,64), histogram: hist, window, ...(keep ? {keepPairs: keep} : {}) });
const kernels = await loadKernels(compileKernels);
const decoding = createRecordDecoding(kernels.tags!);
const source = await openPathSource({ name:'x', size:0, path });
const compiled = openRecords(source, layout, decoding);
const script = openRecords(source, layout);
const records = (compiled.facts as any).records;
const STEP = 2**22;
async function measure(name: string, f: (a: number, b: number) => Promise<void>, most = records) {
  const c = process.cpuUsage(); const w = performance.now();
  for (let i = 0; i < most; i += STEP) await f(i, Math.min(most, i + STEP));
  const d = process.cpuUsage(c); const cpu = (d.user + d.system) / 1e6;
  console.log(name.padEnd(34), (most / cpu / 1e6).toFixed(1).padStart(7), 'M rec/CPU s', ((performance.now() - w) / most * 1e6).toFixed(2), 'ns wall', (cpu / most * 1e9).toFixed(2), 'ns cpu');
}
const hist = { loTick: -100000, binTick: 20, bins: 10000 };
const win = { loTick: -500, hiTick: 500, shiftsTick: [20000,-20000,40000,-40000] };
const buf = new Uint8Array(2**23);
for (let r = 0; r < 2; r++) {
  await measure('bare read (reused buffer)', async (a, b) => { for (let i = a*8; i < b*8; i += 2**23) await source.read(i, Math.min(b*8, i+2**23), buf); });
  await measure('read + decode compiled', async (a, b) => { for await (const x of compiled.read({start:a,end:b}, 0n, never)) void x.count; });
  for (const [n, s] of [['singles only', spec(null, {loTick:0,binTick:1,bins:0})], ['hist 100 ns', spec(null, hist)], ['hist 10 ns', spec(null, {loTick:-10000,binTick:20,bins:1000})], ['windows + hist', spec(win, hist)], ['windows+hist 20', spec({loTick:-500,hiTick:500,shiftsTick:[5000,-5000,10000,-10000]}, {loTick:-20000,binTick:20,bins:2000})], ['keep', spec(win, hist, {minTauTick:-50000,maxTauTick:50000})]] as const) {
    let sum = 0;
    await measure('compiled ' + n, async (a, b) => { const acc = createAccumulator(s, kernels); for await (const x of compiled.read({start:a,end:b}, 0n, never)) acc.push(x); sum += (acc.toPart() as any).tally.prompt.pairs.length; acc.release?.(); });
  }
}
await measure('script read+decode', async (a, b) => { for await (const x of script.read({start:a,end:b}, 0n, never)) void x.count; }, 2**24);
for (const [n, s] of [['hist 100 ns', spec(null, hist)], ['windows + hist', spec(win, hist)]] as const) await measure('script ' + n, async (a, b) => { const acc = createAccumulator(s); for await (const x of script.read({start:a,end:b}, 0n, never)) acc.push(x); void acc.toPart(); }, 2**24);
await compiled.close();
