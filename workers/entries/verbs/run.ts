import { mkdir, writeFile } from 'node:fs/promises';
import { basename, join } from 'node:path';
import type { DialSpec, DialValue, DialValues } from '../../../shared/contracts/dial';
import type { RunInput, RunRequest, RunResult, SourceRef } from '../../../shared/contracts/engine';
import type { Layout } from '../../../shared/contracts/layout';
import type { MapData } from '../../../shared/contracts/output';
import { type Preset, presetSchema } from '../../../shared/contracts/preset';
import type { ResultFile } from '../../../shared/contracts/result';
import { encodeResult } from '../../../shared/contracts/result-codec';
import { Problem } from '../../../shared/errors/problem';
import { studies } from '../../studies/registry';
import { defaultWorkers, type NodeEngine, sourceOfPath } from '../node-engine';
import { encodeNpy } from '../npy';
import { readArguments, readJsonFile, requireOne, wholeNumber } from './arguments';
import { type Console, createProgressLine } from './console';
import { parseShard, runShard } from './shard';

export const runUsage =
  'run PRESET.json --input NAME=FILE[,FILE] ... [--second NAME=FILE] [--set dial=value ...] [--workers n] [--seed n] [--shard i/n] [--out R.json] [--maps DIR]';

const options = {
  input: { type: 'string', multiple: true },
  second: { type: 'string', multiple: true },
  set: { type: 'string', multiple: true },
  workers: { type: 'string' },
  seed: { type: 'string' },
  shard: { type: 'string' },
  out: { type: 'string' },
  maps: { type: 'string' },
} as const;

/** Runs a preset on files. Answers 0, 3 when a check failed, 130 when cancelled. */
export async function run(
  args: readonly string[],
  open: (workers: number) => NodeEngine,
  out: Console,
): Promise<number> {
  const { values, positionals } = readArguments(args, options, runUsage);
  const preset = await readJsonFile(requireOne(positionals, 'preset', runUsage), presetSchema, 'preset');
  const files = parseFiles(values.input ?? [], '--input');
  const seconds = parseFiles(values.second ?? [], '--second');
  for (const name of seconds.keys()) {
    if (files.has(name)) continue;
    throw new Problem(
      'bad-input',
      `--second names "${name}", but there is no --input ${name}=FILE; give both.`,
      '--second',
    );
  }
  const dials = parseDials(preset, values.set ?? []);
  const seed = wholeNumber(values.seed, 'seed', 1, 0);
  const shard = values.shard === undefined ? null : parseShard(values.shard);
  const node = open(wholeNumber(values.workers, 'workers', defaultWorkers(), 1));
  const { engine } = node;
  const inputs: Record<string, RunInput> = {};
  for (const [name, path] of files) {
    inputs[name] = await prepareInput(preset, name, path, seconds.get(name), engine, out);
  }
  const request: RunRequest = { jobId: 'run', study: preset.study, inputs, dials, seed, looks: false };
  if (shard !== null) return runShard({ ...request, preset: preset.name, shard }, values, node, out);
  const line = createProgressLine();
  const outcome = await engine.run(request, (event) => line.show(event));
  line.end();
  if (outcome.status === 'cancelled') return 130;
  if (outcome.status === 'error') {
    throw new Problem(outcome.problem.code, outcome.problem.message, outcome.problem.place);
  }
  await writeResult(outcome.value, preset, values, out);
  return outcome.value.output.checks.some((check) => check.status === 'fail') ? 3 : 0;
}

function parseFiles(given: readonly string[], option: '--input' | '--second'): Map<string, string> {
  const files = new Map<string, string>();
  for (const text of given) {
    const at = text.indexOf('=');
    if (at < 1 || at === text.length - 1) {
      throw new Problem('bad-input', `${option} takes NAME=FILE, found "${text}".`, option);
    }
    const name = text.slice(0, at);
    if (files.has(name)) {
      throw new Problem(
        'bad-input',
        `${option} names "${name}" twice; name the files of one input behind each other, with commas.`,
        option,
      );
    }
    files.set(name, text.slice(at + 1));
  }
  return files;
}

function parseDials(preset: Preset, given: readonly string[]): DialValues {
  const { info } = studies[preset.study];
  const dials: DialValues = { ...preset.dials };
  for (const text of given) {
    const at = text.indexOf('=');
    const id = text.slice(0, Math.max(0, at));
    const dial = info.dials.find((known) => known.id === id);
    if (dial === undefined) {
      const known = info.dials.map((each) => each.id).join(', ');
      throw new Problem('bad-dial', `${info.label} has no dial "${id || text}"; it has ${known}.`, '--set');
    }
    dials[id] = parseDial(dial, text.slice(at + 1));
  }
  return dials;
}

/** "auto" leaves a dial to the study; a region is x0,y0,x1,y1 in pixels, both ends included. */
function parseDial(dial: DialSpec, text: string): DialValue {
  if (dial.type === 'choice') return text;
  if (text === 'auto') return null;
  if (dial.type === 'region') {
    const [x0, y0, x1, y1, ...rest] = text.split(',').map(Number);
    const whole = [x0, y0, x1, y1].every((value) => Number.isSafeInteger(value));
    if (whole && rest.length === 0) return { x0: x0!, y0: y0!, x1: x1!, y1: y1! };
    throw new Problem(
      'bad-dial',
      `The dial "${dial.id}" takes x0,y0,x1,y1 in pixels, found "${text}".`,
      dial.id,
    );
  }
  const value = text.trim() === '' ? Number.NaN : Number(text);
  if (Number.isFinite(value)) return value;
  throw new Problem(
    'bad-dial',
    `The dial "${dial.id}" takes a number in ${dial.unit}, found "${text}".`,
    dial.id,
  );
}

async function prepareInput(
  preset: Preset,
  name: string,
  path: string,
  second: string | undefined,
  engine: NodeEngine['engine'],
  out: Console,
): Promise<RunInput> {
  const [source, ...following] = await sourcesOfInput(path);
  const setting = preset.inputs[name];
  if (setting === undefined || setting.detector === null) {
    throw new Problem(
      'bad-preset',
      `The preset has no detector map for the input "${name}"; add inputs.${name}.detector (see "template ${preset.study}").`,
      `inputs.${name}.detector`,
    );
  }
  const layout = setting.layout ?? (await proposeLayout(source, engine, out));
  const input = { source, following, layout, detector: setting.detector, plane: setting.plane };
  if (second === undefined) return input;
  const file = await sourceOfPath(second);
  const { channelOffset = 0, clock = null, layout: own = null } = setting.companion ?? {};
  const companion = {
    source: file,
    layout: own ?? setting.layout ?? (await proposeLayout(file, engine, out)),
    channelOffset,
    clock,
  };
  return { ...input, companion };
}

/** One file, or several between commas that follow each other; a comma may also be part of one file's name. */
async function sourcesOfInput(paths: string): Promise<[SourceRef, ...SourceRef[]]> {
  try {
    return [await sourceOfPath(paths)];
  } catch (thrown) {
    if (!paths.includes(',')) throw thrown;
  }
  const [first, ...rest] = paths.split(',');
  return [await sourceOfPath(first!), ...(await Promise.all(rest.map(sourceOfPath)))];
}

async function proposeLayout(source: SourceRef, engine: NodeEngine['engine'], out: Console): Promise<Layout> {
  const outcome = await engine.inspect(source, null);
  if (outcome.status === 'error') {
    throw new Problem(outcome.problem.code, outcome.problem.message, outcome.problem.place);
  }
  if (outcome.status === 'cancelled' || outcome.value.layout === null) {
    throw new Problem(
      'bad-layout',
      `${source.name} cannot be read without a layout; describe its bytes in the preset (see "inspect").`,
      source.name,
    );
  }
  out.say(`${source.name}: ${outcome.value.because}`);
  for (const warning of outcome.value.warnings) out.say(`${source.name}: ${warning}`);
  return outcome.value.layout;
}

export async function writeResult(
  result: RunResult,
  preset: { name: string },
  where: { out?: string | undefined; maps?: string | undefined },
  out: Console,
): Promise<void> {
  const file = encodeResult(result, { name: preset.name, version: null });
  if (where.maps !== undefined) await writeMaps(file, result.output.maps, where.maps);
  if (where.out === undefined) {
    await out.json(file);
    return;
  }
  await writeFile(where.out, `${JSON.stringify(file, null, 2)}\n`);
  const { maps: _maps, ...rest } = file;
  await out.json({ ...rest, out: where.out });
  out.say(`Result written to ${where.out}.`);
}

/** Arrays as NPY beside each other; the result then names the files instead of holding the numbers. */
async function writeMaps(file: ResultFile, maps: Record<string, MapData>, folder: string): Promise<void> {
  await mkdir(folder, { recursive: true });
  for (const [id, map] of Object.entries(maps)) {
    const path = join(folder, `${id}.npy`);
    await writeFile(path, encodeNpy(map.shape, map.data));
    const { data: _data, ...rest } = file.maps[id]!;
    file.maps[id] = { ...rest, file: basename(path) };
  }
}
