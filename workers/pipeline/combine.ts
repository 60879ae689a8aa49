import type { InputProvenance, RunResult } from '../../shared/contracts/engine';
import { Problem } from '../../shared/errors/problem';
import { type Accumulator, createAccumulator, mergePart } from '../accumulators/accumulator';
import { type CompiledKernels, NO_COMPILED_KERNELS } from '../accumulators/compiled-kernels';
import { assertWholePart } from '../accumulators/whole-part';
import { studyById } from '../studies/registry';
import type { CountedInput, StudyInput } from '../studies/study';
import { planChunks } from './chunks';
import { assertFitsMemory } from './memory';
import type { PartFile } from './part-file';
import type { PartHead, PartInput } from './part-head';
import { fingerprintSpec, rangeOfShard } from './shards';
import { ENGINE_VERSION } from './version';

/** A part by its head; the counts are loaded one part at a time. */
export interface GivenPart {
  /** What to call it in a sentence: its path. */
  place: string;
  head: PartHead;
}

/**
 * Merges the parts of all shards of a run in file order and finishes. Counts are those of the unsharded run; sums of
 * floating-point numbers are associated in another order, which moves their last bits.
 * @throws Problem that names the shard which is missing, given twice, or of another run.
 */
export async function combineParts(
  given: readonly GivenPart[],
  load: (place: string) => Promise<PartFile>,
  kernels: CompiledKernels = NO_COMPILED_KERNELS,
): Promise<RunResult> {
  const from = Date.now();
  const [first, ...others] = inOrder(given);
  for (const other of others) assertSameRun(first, other);
  const { head } = first;
  const study = studyById(head.study);
  const inputs = head.inputs.map((input) => ({ input, studyInput: studyInputOf(input) }));
  study.validate(
    Object.fromEntries(inputs.map(({ input, studyInput }) => [input.name, studyInput])),
    head.dials,
  );
  const countings: Counting[] = [];
  for (const { input, studyInput } of inputs) {
    const spec = study.spec(studyInput, head.dials, input.chosen);
    assertFitsMemory(input.name, spec);
    if ((await fingerprintSpec(spec)) !== input.spec) {
      throw notOfRun(
        first,
        `it was counted by another specification than this engine makes for "${input.name}"`,
      );
    }
    countings.push({
      input,
      studyInput,
      spec,
      accumulator: createAccumulator(spec, { ...kernels, tags: null }),
    });
  }
  for (const { place } of [first, ...others]) await mergeFile(countings, place, await load(place));
  const counted = countings.map(({ input, studyInput, accumulator }): [string, CountedInput] => [
    input.name,
    { ...studyInput, tally: accumulator.tally(), chosen: input.chosen },
  ]);
  const { dials, seed } = head;
  const output = study.finish({ inputs: Object.fromEntries(counted), dials, seed, partial: false });
  const heads = [first, ...others].map((part) => part.head);
  return {
    output,
    provenance: {
      inputs: head.inputs.flatMap((input) => provenanceOf(input, first.place)),
      dials,
      engine: ENGINE_VERSION,
      seed,
      startedAt: heads.map((each) => each.startedAt).sort()[0]!,
      // Machine time: the shards may have run at the same time or not.
      seconds: heads.reduce((sum, each) => sum + each.seconds, (Date.now() - from) / 1000),
    },
  };
}

interface Counting {
  input: PartInput;
  studyInput: StudyInput;
  spec: ReturnType<ReturnType<typeof studyById>['spec']>;
  accumulator: Accumulator;
}

async function mergeFile(countings: readonly Counting[], place: string, file: PartFile): Promise<void> {
  for (const { input, spec, accumulator } of countings) {
    try {
      const part = file.parts[input.name];
      assertWholePart(spec, part);
      mergePart(accumulator, spec, part);
    } catch (thrown) {
      if (thrown instanceof Problem) {
        throw new Problem(thrown.code, thrown.message, `${place}, input "${input.name}"`);
      }
      throw thrown;
    }
  }
}

function studyInputOf({ layout, detector, plane, facts, clock }: PartInput): StudyInput {
  return { layout, detector, plane, facts, ...(clock === undefined ? {} : { clock }) };
}

/** Shards 1 to n, each once. */
function inOrder(given: readonly GivenPart[]): [GivenPart, ...GivenPart[]] {
  const byIndex = new Map<number, GivenPart>();
  const [any] = given;
  if (any === undefined) {
    throw new Problem(
      'missing-input',
      'There is no part to combine; name the files that "run --shard" wrote.',
    );
  }
  const { of } = any.head.shard;
  for (const part of given) {
    const { shard } = part.head;
    if (shard.of !== of) {
      throw notOfRun(part, `it is one of ${shard.of} shards, ${any.place} is one of ${of}`);
    }
    if (shard.index > of) throw notOfRun(part, `it calls itself shard ${shard.index} of ${of}`);
    const twin = byIndex.get(shard.index);
    if (twin !== undefined) {
      throw new Problem(
        'bad-input',
        `Shard ${shard.index} of ${of} is given twice, as ${twin.place} and as ${part.place}; leave one out.`,
        part.place,
      );
    }
    byIndex.set(shard.index, part);
    assertRange(part);
  }
  const missing = Array.from({ length: of }, (_, i) => i + 1).filter((index) => !byIndex.has(index));
  if (missing.length > 0) {
    const names = missing.slice(0, 10).join(', ') + (missing.length > 10 ? ', ...' : '');
    const [are, shards] = missing.length === 1 ? ['is', 'Shard'] : ['are', 'Shards'];
    throw new Problem(
      'missing-input',
      `${shards} ${names} of ${of} ${are} missing; count with "--shard ${missing[0]}/${of}" and combine again.`,
      `shard ${missing[0]}/${of}`,
    );
  }
  const ordered = [...byIndex.entries()].sort(([a], [b]) => a - b).map(([, part]) => part);
  return ordered as [GivenPart, ...GivenPart[]];
}

/** Everything but who counted what and when has to agree. */
function assertSameRun(first: GivenPart, other: GivenPart): void {
  const [a, b] = [first.head, other.head];
  const words: [string, unknown, unknown][] = [
    ['engine', a.engine, b.engine],
    ['study', a.study, b.study],
    ['preset', a.preset, b.preset],
    ['dials', a.dials, b.dials],
    ['seed', a.seed, b.seed],
    ['inputs', a.inputs.map((input) => input.name), b.inputs.map((input) => input.name)],
  ];
  a.inputs.forEach((input, i) => {
    const twin = b.inputs[i];
    if (twin === undefined) return;
    const of = `of the input "${input.name}"`;
    words.push(
      [`files ${of}`, filesOf(input), filesOf(twin)],
      [`layout ${of}`, [input.layout, input.facts], [twin.layout, twin.facts]],
      [`detector map ${of}`, input.detector, twin.detector],
      [`plane ${of}`, input.plane, twin.plane],
      [`clock ${of}`, input.clock ?? null, twin.clock ?? null],
      [`delay and window ${of}`, [input.chosen, input.spec], [twin.chosen, twin.spec]],
    );
  });
  const differing = words.find(([, x, y]) => JSON.stringify(x) !== JSON.stringify(y));
  if (differing !== undefined) {
    const found = typeof differing[2] === 'object' ? '' : ` (${differing[1]} and ${differing[2]})`;
    throw notOfRun(other, `its ${differing[0]} and those of ${first.place} differ${found}`);
  }
  if (b.engine !== ENGINE_VERSION) {
    throw notOfRun(other, `engine ${b.engine} counted it, and this is engine ${ENGINE_VERSION}`);
  }
}

function filesOf(input: PartInput): unknown {
  return input.files.map(({ name, bytes, ends, layout }) => [name, bytes, ends, layout]);
}

function notOfRun(part: GivenPart, why: string): Problem {
  return new Problem(
    'bad-input',
    `${part.place} does not belong to this run: ${why}; combine parts of one preset, the same files and one engine.`,
    part.place,
  );
}

function provenanceOf(input: PartInput, place: string): InputProvenance[] {
  return input.files.map(({ name: fileName, bytes, layout, sha256 }) => {
    if (sha256 === null) {
      throw new Problem(
        'bad-input',
        `Shard 1 has no fingerprint of ${fileName}; count it again with "--shard 1/n".`,
        place,
      );
    }
    const { name, detector, plane } = input;
    return { name, fileName, sha256, bytes, layout, detector, plane };
  });
}

/** The chunks a part says it holds are those of its place in the run. */
function assertRange({ place, head }: GivenPart): void {
  for (const { name, facts, range } of head.inputs) {
    const expected = rangeOfShard(head.shard, planChunks(facts).length);
    if (JSON.stringify(expected) === JSON.stringify(range)) continue;
    throw new Problem(
      'bad-input',
      `${place} holds chunks ${range.first} to ${range.stop} of ${range.chunks} of "${name}", where ${expected.first} to ${expected.stop} of ${expected.chunks} were expected; count this shard again with this engine.`,
      place,
    );
  }
}
