import type { Detector } from '../../shared/contracts/detector';
import type { DialValues } from '../../shared/contracts/dial';
import type {
  Companion,
  Engine,
  EngineOptions,
  InputProvenance,
  PairsKept,
  RunEvent,
  RunInput,
  RunRequest,
  RunResult,
  SourceRef,
} from '../../shared/contracts/engine';
import type { ReaderFacts } from '../../shared/contracts/reader';
import type { Tally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { type CompiledKernels, NO_COMPILED_KERNELS } from '../accumulators/compiled-kernels';
import { fillDials } from '../studies/dials';
import { studyById } from '../studies/registry';
import type { Chosen, ClockFacts, CountedInput, FinishRequest, Study } from '../studies/study';
import { answer } from './answer';
import { isSameInput, isSameSource } from './bytes-key';
import { SEARCH_RECORDS } from './chunks';
import type { ComputeHost } from './compute';
import { type CountRequest, memoKey } from './count-request';
import { countInputs, countRange } from './counting';
import { Job } from './job';
import { type CompileKernels, loadKernels } from './kernels';
import { assertFitsMemory } from './memory';
import { createPool } from './pool';
import { createStage } from './progress';
import { bytesOfInput, filesOf, keyOfInput, type ReadInput } from './read-input';
import { TallyMemo } from './tally-memo';
import { ENGINE_VERSION } from './version';

/** A look may take at most this share of the time, so that looking never holds the reading up. */
const LOOK_SHARE = 0.15;
const LOOK_EVERY_MS = 250;
const PAIR_BYTES = 512 * 2 ** 20;

/** What earlier runs have found out about files, and what they counted. */
interface Known {
  clocks: { input: ReadInput; clock: ClockFacts }[];
  counts: TallyMemo;
  facts: { input: ReadInput; facts: ReaderFacts }[];
  fingerprints: { source: SourceRef; sha256: string }[];
  /** For the seams between chunks of frames. */
  kernels: Promise<CompiledKernels> | null;
}

/** The engine over compute workers it is given; the same in the page and under Node. */
export function createEngine(
  hosts: readonly ComputeHost[],
  { pairBytes = PAIR_BYTES }: EngineOptions = {},
  compileKernels: CompileKernels = async () => null,
): Engine {
  const pool = createPool(hosts);
  const known: Known = {
    clocks: [],
    counts: new TallyMemo(pairBytes),
    facts: [],
    fingerprints: [],
    kernels: null,
  };
  const jobs = new Map<string, Job>();

  return {
    inspect: (source, layout) => pool.run((host) => host.inspect(source, layout), { cancelled: false }),
    async run(request, onEvent) {
      const emit = (event: RunEvent): void => {
        // Told, not awaited. One that cannot be delivered means that nobody listens any more.
        Promise.resolve(onEvent(event)).catch(() => job.cancel());
      };
      const job: Job = new Job(request.jobId, pool, emit, request.quick);
      jobs.set(request.jobId, job);
      try {
        known.kernels ??= loadKernels(compileKernels);
        const outcome = await answer(() => runStudy(job, request, known));
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

async function runStudy(job: Job, request: RunRequest, known: Known): Promise<RunResult> {
  const startedAt = new Date();
  const study = studyById(request.study);
  const dials = fillDials(study.info, request.dials);
  const inputs = await gatherInputs(job, study, request.inputs, known);
  study.validate(Object.fromEntries(inputs.map(({ name, studyInput }) => [name, studyInput])), dials);
  job.checkCancelled();
  const chosen = new Map<string, Chosen>();
  const requests: CountRequest[] = [];
  for (const input of inputs) {
    const found = await findChosen(job, study, input, dials, known.counts);
    chosen.set(input.name, found);
    const spec = study.spec(input.studyInput, dials, found);
    assertFitsMemory(input.name, spec);
    requests.push({ ...input, spec });
  }
  const finish = (tallies: Map<string, Tally>, partial: boolean): FinishRequest => ({
    inputs: countedInputs(requests, tallies, chosen),
    dials,
    seed: request.seed,
    partial,
  });
  const look = createLook(request.looks !== false, (tallies, fraction) => {
    job.emit({ kind: 'partial', jobId: job.id, output: study.finish(finish(tallies, true)), fraction });
  });
  const tallies = await countInputs(
    job,
    requests,
    known.counts,
    look,
    (await known.kernels) ?? NO_COMPILED_KERNELS,
  );
  // Hashing reads the file once more; it goes after counting so that the answer does not wait for it in the pool.
  const [hashedInputs, output] = await Promise.all([
    fingerprintInputs(job, requests, known.fingerprints),
    Promise.resolve().then(() => study.finish(finish(tallies, request.quick === true))),
  ]);
  job.checkCancelled();
  const pairs = pairsKept(requests, known.counts);
  return {
    output,
    ...(pairs === null ? {} : { pairs }),
    provenance: {
      inputs: hashedInputs,
      dials,
      engine: ENGINE_VERSION,
      seed: request.seed,
      startedAt: startedAt.toISOString(),
      seconds: (Date.now() - startedAt.getTime()) / 1000,
    },
  };
}

type GatheredInput = Omit<CountRequest, 'spec'>;

/** Opens every input the study asks for. */
export async function gatherInputs(
  job: Job,
  study: Study,
  given: Record<string, RunInput>,
  before: Pick<Known, 'facts' | 'clocks'> = { facts: [], clocks: [] },
): Promise<GatheredInput[]> {
  for (const name of Object.keys(given)) {
    if (study.info.inputs.some((spec) => spec.name === name)) continue;
    const known = study.info.inputs.map((spec) => spec.name).join(', ');
    throw new Problem('bad-input', `${study.info.label} has no input "${name}"; it takes ${known}.`, name);
  }
  return Promise.all(
    study.info.inputs.map(async (spec) => {
      const asked = given[spec.name];
      if (asked === undefined) {
        throw new Problem(
          'missing-input',
          `${study.info.label} needs an acquisition for "${spec.name}" (${spec.label}); choose one.`,
          spec.name,
        );
      }
      assertKinds(spec.name, spec.accepts, asked.layout.kind, asked.detector);
      const { input, clock } = await withClock(job, spec.name, asked, before.clocks);
      const facts = await findFacts(job, spec.name, input, before.facts);
      const { layout, detector, plane } = input;
      return { name: spec.name, input, studyInput: { layout, detector, plane, facts, ...clock } };
    }),
  );
}

/** The input with the clock of its companion, found where it is not given, and what is known of it. */
async function withClock(
  job: Job,
  name: string,
  input: RunInput,
  before: Known['clocks'],
): Promise<{ input: RunInput; clock: { clock?: ClockFacts } }> {
  const { companion } = input;
  if (companion === undefined) return { input, clock: {} };
  if (companion.clock !== null) {
    const { offsetPs, drift } = companion.clock;
    const given = { offset: { value: offsetPs, sigma: 0 }, drift: { value: drift, sigma: 0 }, line: null };
    return { input, clock: { clock: given } };
  }
  const known = before.find((entry) => isSameInput(entry.input, input))?.clock;
  const stage = createStage(job.id, `${name}: finding the clock offset`, bytesOfInput(input), job.emit);
  const clock =
    known ??
    (await job.run(name, (host, taskId) =>
      host.findClock(taskId, input, ({ bytes }) => stage.add(bytes, 0)),
    ));
  if (known === undefined && keyOfInput(input) !== null) before.push({ input, clock });
  const found = { offsetPs: clock.offset.value, drift: clock.drift.value };
  return { input: { ...input, companion: { ...companion, clock: found } }, clock: { clock } };
}

async function findFacts(
  job: Job,
  name: string,
  input: RunInput,
  known: Known['facts'],
): Promise<ReaderFacts> {
  const before = known.find((entry) => isSameInput(entry.input, input));
  if (before !== undefined) return before.facts;
  const facts = await job.run(name, (host) => host.facts(input));
  if (keyOfInput(input) !== null) known.push({ input, facts });
  return facts;
}

/** Of all inputs of time tags together; null when there are none. */
function pairsKept(requests: readonly CountRequest[], counts: TallyMemo): PairsKept | null {
  const each = requests
    .filter(({ spec }) => spec.kind === 'tags')
    .map((request) => counts.pairs.status(memoKey(request)));
  return each.reduce<PairsKept | null>((all, one) => {
    if (all === null || one.kept === null) return one;
    return all.kept === null ? all : { kept: all.kept + one.kept, bytes: all.bytes + one.bytes };
  }, null);
}

function assertKinds(
  name: string,
  accepts: readonly ('tags' | 'frames')[],
  kind: 'tags' | 'frames',
  detector: Detector,
): void {
  if (!accepts.includes(kind)) {
    throw new Problem(
      'bad-input',
      `The input "${name}" takes ${accepts.join(' or ')}, but the layout reads ${kind}; choose another acquisition.`,
      name,
    );
  }
  if (detector.kind !== kind) {
    throw new Problem(
      'bad-detector',
      `The layout of "${name}" reads ${kind}, but its detector map is for ${detector.kind}; give it a map for ${kind}.`,
      name,
    );
  }
}

export async function findChosen(
  job: Job,
  study: Study,
  input: GatheredInput,
  dials: DialValues,
  memo: TallyMemo,
): Promise<Chosen> {
  const spec = study.searchSpec(input.studyInput, dials);
  const { facts } = input.studyInput;
  if (spec === null || facts.kind !== 'tags') return {};
  const request = { ...input, spec };
  // When nothing stands out of the first records, more are searched, at last all.
  const ends = [SEARCH_RECORDS, 16 * SEARCH_RECORDS, facts.records];
  for (const end of new Set(ends.map((each) => Math.min(each, facts.records)))) {
    const tally = await countRange(job, request, { start: 0, end }, memo);
    const found = tally.kind === 'tags' ? study.choose(tally, input.studyInput, dials) : null;
    if (found !== null) return found;
  }
  return study.chooseBlind(input.studyInput, dials);
}

function countedInputs(
  requests: readonly CountRequest[],
  tallies: Map<string, Tally>,
  chosen: Map<string, Chosen>,
): Record<string, CountedInput> {
  const counted: Record<string, CountedInput> = {};
  for (const { name, studyInput } of requests) {
    const tally = tallies.get(name);
    if (tally !== undefined) counted[name] = { ...studyInput, tally, chosen: chosen.get(name) ?? {} };
  }
  return counted;
}

/** Looks keep a distance of several times what the last one cost. */
function createLook(
  wanted: boolean,
  show: (tallies: Map<string, Tally>, fraction: number) => void,
): {
  isWanted(): boolean;
  show(tallies: Map<string, Tally>, fraction: number): void;
} {
  let notBefore = wanted ? 0 : Number.POSITIVE_INFINITY;
  return {
    isWanted: () => performance.now() >= notBefore,
    show(tallies, fraction) {
      const from = performance.now();
      show(tallies, fraction);
      const to = performance.now();
      notBefore = to + Math.max(LOOK_EVERY_MS, (to - from) / LOOK_SHARE);
    },
  };
}

/** The clock is found before counting, so that it is known here. */
function secondOf({ channelOffset, clock }: Companion): InputProvenance['second'] {
  return clock === null ? undefined : { channelOffset, ...clock };
}

/** One entry a file, so that every byte the numbers come from is named. */
async function fingerprintInputs(
  job: Job,
  requests: readonly CountRequest[],
  kept: { source: SourceRef; sha256: string }[],
): Promise<InputProvenance[]> {
  const known = (source: SourceRef): string | undefined =>
    kept.find((entry) => isSameSource(entry.source, source))?.sha256;
  const files = requests.flatMap(({ name, input }) =>
    filesOf(input).map((file) => ({
      ...file,
      name,
      detector: input.detector,
      plane: input.plane,
      second: file === input.companion ? secondOf(input.companion) : undefined,
    })),
  );
  const bytes = files.reduce((sum, { source }) => sum + (known(source) === undefined ? source.size : 0), 0);
  const stage = bytes > 0 ? createStage(job.id, 'fingerprints of the files', bytes, job.emit) : null;
  return Promise.all(
    files.map(async ({ name, source, layout, detector, plane, second }) => {
      const sha256 =
        known(source) ??
        (await job.run(name, (host, taskId) =>
          host.fingerprint(taskId, source, (progress) => stage?.add(progress.bytes, 0)),
        ));
      if (known(source) === undefined) kept.push({ source, sha256 });
      const entry = { name, fileName: source.name, sha256, bytes: source.size, layout, detector, plane };
      return second === undefined ? entry : { ...entry, second };
    }),
  );
}
