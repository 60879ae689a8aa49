import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { z } from '../../shared/util/zod';
import { startContender } from './contender';
import { type BenchSettings, makeData } from './measure';
import type { KernelRow } from './rows';
import { benchFolder } from './tools';

/** The little of V8's profile that is read here. */
const profileSchema = z.object({
  nodes: z.array(
    z.object({
      id: z.number(),
      callFrame: z.object({ functionName: z.string(), url: z.string(), lineNumber: z.number() }),
    }),
  ),
  samples: z.array(z.number()),
  timeDeltas: z.array(z.number()),
});

const SHOWN = 25;

/** Where the time of our kernel goes: functions by their own share of the passes. */
export async function profileRow(row: KernelRow, settings: BenchSettings): Promise<string> {
  const { data, items } = makeData(row, settings);
  const [adapter = '', ...rest] = row.adapter;
  const file = join(data, 'profile.json');
  const ours = await startContender(
    'our kernel',
    process.execPath,
    ['--import', 'tsx', `${benchFolder}/ours/main.ts`, adapter, data, ...rest],
    { BENCH_PROFILE: file },
  );
  for (let pass = 0; pass < settings.passes; pass++) await ours.pass(items);
  await ours.stop();
  const profile = profileSchema.parse(JSON.parse(readFileSync(file, 'utf8')));
  const nodes = new Map(profile.nodes.map((node) => [node.id, node.callFrame]));
  const own = new Map<string, number>();
  let total = 0;
  profile.samples.forEach((id, i) => {
    const frame = nodes.get(id);
    const microseconds = profile.timeDeltas[i] ?? 0;
    if (frame === undefined || frame.functionName === '(idle)') return;
    const place =
      frame.url === '' ? '' : ` ${frame.url.split('/').slice(-2).join('/')}:${frame.lineNumber + 1}`;
    const name = `${frame.functionName || '(anonymous)'}${place}`;
    own.set(name, (own.get(name) ?? 0) + microseconds);
    total += microseconds;
  });
  return [...own]
    .sort(([, a], [, b]) => b - a)
    .slice(0, SHOWN)
    .map(([name, time]) => `${((100 * time) / total).toFixed(1).padStart(5)} %  ${name}`)
    .join('\n');
}
