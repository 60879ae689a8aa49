import { createSHA256 } from 'hash-wasm';
import type { OnRunEvent, RunInput, RunRequest, SourceRef } from '../../shared/contracts/engine';
import type { Outcome } from '../../shared/contracts/outcome';
import type { ByteSource } from '../../shared/contracts/reader';
import type { TallySpec } from '../../shared/contracts/tally';
import type { CompiledKernels } from '../accumulators/compiled-kernels';
import { fillDials } from '../studies/dials';
import { studyById } from '../studies/registry';
import type { Chosen } from '../studies/study';
import { answer } from './answer';
import { planChunks } from './chunks';
import type { ComputeHost } from './compute';
import type { CountRequest } from './count-request';
import { countShard } from './counting';
import { findChosen, gatherInputs } from './engine';
import { type FrozenArray, freeze } from './freeze';
import { Job } from './job';
import { type CompileKernels, loadKernels } from './kernels';
import { assertFitsMemory } from './memory';
import type { PartFile } from './part-file';
import type { PartFileFacts, PartInput } from './part-head';
import { createPool } from './pool';
import { createStage } from './progress';
import { filesOf } from './read-input';
import { TallyMemo } from './tally-memo';
import { ENGINE_VERSION } from './version';

export interface Shard {
  /** From 1 to `of`. */
  index: number;
  of: number;
}

export interface ShardRequest extends RunRequest {
  preset: string;
  shard: Shard;
}

/**
 * A run in pieces, each on a machine of its own. Shard i of n counts chunks floor((i-1) m/n) to floor(i m/n) of the m
 * chunks of every input, which the file alone decides, so the parts merge as the chunks of one machine would.
 *
 * Cost of a shard beside its chunks: the search for the delay over the first million records (over more, at last over all of them, when
 * no peak stands out), unless the dials say delay and window; and, where a counter rolls over, a scan of what comes
 * before its chunks, by each of its workers.
 */
export interface ShardEngine {
  run(request: ShardRequest, onEvent: OnRunEvent): Promise<Outcome<PartFile>>;
  cancel(jobId: string): Promise<void>;
}

const END_BYTES = 2 ** 20;

export function createShardEngine(
  hosts: readonly ComputeHost[],
  openSource: (ref: SourceRef) => Promise<ByteSource>,
  compileKernels: CompileKernels,
): ShardEngine {
  const kernels = loadKernels(compileKernels);
  const pool = createPool(hosts);
  const jobs = new Map<string, Job>();
  return {
    async run(request, onEvent) {
      const job: Job = new Job(request.jobId, pool, (event) => {
        // Told, not awaited. One that cannot be delivered means that nobody listens any more.
        Promise.resolve(onEvent(event)).catch(() => job.cancel());
      });
      jobs.set(request.jobId, job);
      try {
        const outcome = await answer(() => runShard(job, request, openSource, kernels));
        if (outcome.status !== 'ok') job.cancel();
        return outcome;
      } finally {
        jobs.delete(request.jobId);
      }
    },
    async cancel(jobId) {
      jobs.get(jobId)?.cancel();
    },
  };
}

async function runShard(
  job: Job,
  request: ShardRequest,
  openSource: (ref: SourceRef) => Promise<ByteSource>,
  kernels: Promise<CompiledKernels>,
): Promise<PartFile> {
  const startedAt = new Date();
  const { shard, seed } = request;
  const study = studyById(request.study);
  const dials = fillDials(study.info, request.dials);
  const gathered = await gatherInputs(job, study, request.inputs);
  study.validate(Object.fromEntries(gathered.map(({ name, studyInput }) => [name, studyInput])), dials);
  const memo = new TallyMemo();
  const counted: { request: CountRequest; chosen: Chosen; range: PartInput['range'] }[] = [];
  for (const input of gathered) {
    const chosen = await findChosen(job, study, input, dials, memo);
    const spec = study.spec(input.studyInput, dials, chosen);
    assertFitsMemory(input.name, spec);
    const range = rangeOfShard(shard, planChunks(input.studyInput.facts).length);
    counted.push({ request: { ...input, spec }, chosen, range });
  }
  const parts = await countShard(
    job,
    counted.map(({ request: each, range }) => ({
      request: each,
      chunks: planChunks(each.studyInput.facts).slice(range.first, range.stop),
    })),
    await kernels,
  );
  const inputs: PartInput[] = [];
  for (const { request: each, chosen, range } of counted) {
    const { name, studyInput, spec } = each;
    const files = await describeFiles(job, name, each.input, shard.index === 1, openSource);
    inputs.push({ name, files, ...studyInput, chosen, spec: await fingerprintSpec(spec), range });
  }
  job.checkCancelled();
  return {
    head: {
      gemel: 1,
      kind: 'part',
      engine: ENGINE_VERSION,
      preset: request.preset,
      study: request.study,
      dials,
      seed,
      shard: { ...shard },
      startedAt: startedAt.toISOString(),
      seconds: (Date.now() - startedAt.getTime()) / 1000,
      inputs,
    },
    parts: Object.fromEntries(parts),
  };
}

export function rangeOfShard({ index, of }: Shard, chunks: number): PartInput['range'] {
  return { first: Math.floor(((index - 1) * chunks) / of), stop: Math.floor((index * chunks) / of), chunks };
}

/** SHA-256 of everything the specification says, its tables included. */
export async function fingerprintSpec(spec: TallySpec): Promise<string> {
  const arrays: FrozenArray[] = [];
  const text = JSON.stringify(freeze(spec, arrays));
  const hash = await createSHA256();
  hash.init();
  hash.update(text);
  for (const { buffer, byteOffset, byteLength } of arrays) {
    hash.update(new Uint8Array(buffer, byteOffset, byteLength));
  }
  return hash.digest('hex');
}

async function describeFiles(
  job: Job,
  name: string,
  input: RunInput,
  whole: boolean,
  openSource: (ref: SourceRef) => Promise<ByteSource>,
): Promise<PartFileFacts[]> {
  const files = filesOf(input);
  const bytes = files.reduce((sum, { source }) => sum + source.size, 0);
  const stage = whole ? createStage(job.id, `${name}: fingerprint of the file`, bytes, job.emit) : null;
  return Promise.all(
    files.map(async ({ source, layout }) => ({
      name: source.name,
      bytes: source.size,
      layout,
      ends: await fingerprintEnds(source, openSource),
      sha256: whole
        ? await job.run(name, (host, taskId) =>
            host.fingerprint(taskId, source, (progress) => stage?.add(progress.bytes, 0)),
          )
        : null,
    })),
  );
}

/** Tells files of the same size apart for two MiB of reading; a short file is hashed as a whole, its middle twice. */
async function fingerprintEnds(
  ref: SourceRef,
  openSource: (ref: SourceRef) => Promise<ByteSource>,
): Promise<string> {
  const source = await openSource(ref);
  try {
    const hash = await createSHA256();
    hash.init();
    hash.update(await source.read(0, Math.min(END_BYTES, source.size)));
    hash.update(await source.read(Math.max(0, source.size - END_BYTES), source.size));
    return hash.digest('hex');
  } finally {
    await source.close();
  }
}
