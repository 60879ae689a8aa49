import type { Detector } from '../../shared/contracts/detector';
import type { DialValues } from '../../shared/contracts/dial';
import type {
  Engine,
  InputProvenance,
  RunInput,
  RunRequest,
  RunResult,
  SourceRef,
} from '../../shared/contracts/engine';
import type { Tally } from '../../shared/contracts/tally';
import { Problem } from '../../shared/errors/problem';
import { fillDials } from '../studies/dials';
import { studyById } from '../studies/registry';
import type { Chosen, CountedInput, FinishRequest, Study } from '../studies/study';
import { answer } from './answer';
import type { ComputeHost } from './compute';
import { type CountRequest, countInputs, countRange } from './counting';
import { Job } from './job';
import { assertFitsMemory } from './memory';
import { createPool } from './pool';
import { createStage } from './progress';
import { isSameSource, TallyMemo } from './tally-memo';
import { ENGINE_VERSION } from './version';

/** Records of the first look for the coincidence peak; when nothing stands out, the whole acquisition is searched. */
const SEARCH_RECORDS = 2 ** 21;
/** A look may take at most this share of the time, so that looking never holds the reading up. */
const LOOK_SHARE = 0.15;
const LOOK_EVERY_MS = 250;

/** The engine over compute workers it is given; the same in the page and under Node. */
export function createEngine(hosts: readonly ComputeHost[]): Engine {
  const pool = createPool(hosts);
  const memo = new TallyMemo();
  const fingerprints: { source: SourceRef; sha256: string }[] = [];
  const jobs = new Map<string, Job>();

  return {
    inspect: (source, layout) => pool.run((host) => host.inspect(source, layout), { cancelled: false }),
    async run(request, onEvent) {
      const job: Job = new Job(request.jobId, pool, (event) => {
        // Told, not awaited. One that cannot be delivered means that nobody listens any more.
        Promise.resolve(onEvent(event)).catch(() => job.cancel());
      });
      jobs.set(request.jobId, job);
      try {
        const outcome = await answer(() => runStudy(job, request, memo, fingerprints));
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

async function runStudy(
  job: Job,
  request: RunRequest,
  memo: TallyMemo,
  fingerprints: { source: SourceRef; sha256: string }[],
): Promise<RunResult> {
  const startedAt = new Date();
  const study = studyById(request.study);
  const dials = fillDials(study.info, request.dials);
  const inputs = await gatherInputs(job, study, request.inputs);
  study.validate(Object.fromEntries(inputs.map(({ name, studyInput }) => [name, studyInput])), dials);
  job.checkCancelled();
  const chosen = new Map<string, Chosen>();
  const requests: CountRequest[] = [];
  for (const input of inputs) {
    const found = await findChosen(job, study, input, dials, memo);
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
  const look = createLook((tallies, fraction) => {
    job.emit({ kind: 'partial', jobId: job.id, output: study.finish(finish(tallies, true)), fraction });
  });
  const tallies = await countInputs(job, requests, memo, look);
  // Hashing reads the file once more; it goes after counting so that the answer does not wait for it in the pool.
  const [hashedInputs, output] = await Promise.all([
    fingerprintInputs(job, requests, fingerprints),
    Promise.resolve().then(() => study.finish(finish(tallies, false))),
  ]);
  job.checkCancelled();
  return {
    output,
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
): Promise<GatheredInput[]> {
  for (const name of Object.keys(given)) {
    if (study.info.inputs.some((spec) => spec.name === name)) continue;
    const known = study.info.inputs.map((spec) => spec.name).join(', ');
    throw new Problem('bad-input', `${study.info.label} has no input "${name}"; it takes ${known}.`, name);
  }
  return Promise.all(
    study.info.inputs.map(async (spec) => {
      const input = given[spec.name];
      if (input === undefined) {
        throw new Problem(
          'missing-input',
          `${study.info.label} needs an acquisition for "${spec.name}" (${spec.label}); choose one.`,
          spec.name,
        );
      }
      assertKinds(spec.name, spec.accepts, input.layout.kind, input.detector);
      const facts = await job.run(spec.name, (host) => host.facts(input.source, input.layout));
      const { layout, detector, plane } = input;
      return { name: spec.name, input, studyInput: { layout, detector, plane, facts } };
    }),
  );
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
  for (const end of new Set([Math.min(SEARCH_RECORDS, facts.records), facts.records])) {
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
function createLook(show: (tallies: Map<string, Tally>, fraction: number) => void): {
  isWanted(): boolean;
  show(tallies: Map<string, Tally>, fraction: number): void;
} {
  let notBefore = 0;
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

async function fingerprintInputs(
  job: Job,
  requests: readonly CountRequest[],
  kept: { source: SourceRef; sha256: string }[],
): Promise<InputProvenance[]> {
  const known = (source: SourceRef): string | undefined =>
    kept.find((entry) => isSameSource(entry.source, source))?.sha256;
  const bytes = requests.reduce(
    (sum, { input }) => sum + (known(input.source) === undefined ? input.source.size : 0),
    0,
  );
  const stage = bytes > 0 ? createStage(job.id, 'fingerprints of the files', bytes, job.emit) : null;
  return Promise.all(
    requests.map(async ({ name, input }) => {
      const { source, layout, detector, plane } = input;
      const sha256 =
        known(source) ??
        (await job.run(name, (host, taskId) =>
          host.fingerprint(taskId, source, (progress) => stage?.add(progress.bytes, 0)),
        ));
      if (known(source) === undefined) kept.push({ source, sha256 });
      return { name, fileName: source.name, sha256, bytes: source.size, layout, detector, plane };
    }),
  );
}
