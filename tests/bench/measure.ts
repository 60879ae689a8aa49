import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { assertSameAnswer } from './compare';
import { type Contender, type Pass, startContender } from './contender';
import type { Finding } from './finding';
import type { KernelRow } from './rows';
import { growthExponent, median } from './statistics';
import { benchFolder, compileLimit } from './tools';

export interface BenchSettings {
  python: string;
  /** False when no compiler is there: the limits are left out. */
  cpp: boolean;
  /** Temporary folder of the whole run. */
  folder: string;
  passes: number;
  /** Share of the items of a full run. */
  share: number;
}

/** The invented data of a row, in a folder of their own. */
export function makeData(row: KernelRow, settings: BenchSettings): { data: string; items: number } {
  const { python, folder, share } = settings;
  const data = mkdtempSync(join(folder, `${row.name}-`));
  const items = even(row.items * share);
  const [kind, ...rest] = row.data;
  const script = `${benchFolder}/numpy/make_data.py`;
  const made = spawnSync(python, [script, kind, data, String(items), ...rest], { stdio: 'inherit' });
  if (made.status !== 0) throw new Error(`The data of ${row.name} could not be made.`);
  return { data, items };
}

/** Runs all contenders of a row on the same data, one pass of each after the other. */
export async function measureRow(row: KernelRow, settings: BenchSettings): Promise<Finding> {
  const { python, passes } = settings;
  const { data, items } = makeData(row, settings);
  const contenders: Contender[] = [];
  const start = async (name: string, command: string, args: readonly string[]): Promise<Contender> => {
    const contender = await startContender(name, command, args);
    contenders.push(contender);
    return contender;
  };
  const script = ([name, ...args]: readonly string[]): string[] => [
    `${benchFolder}/numpy/${name}.py`,
    data,
    ...args,
  ];
  try {
    const ours = await start('our kernel', process.execPath, [
      '--import',
      'tsx',
      `${benchFolder}/ours/main.ts`,
      ...row.adapter.slice(0, 1),
      data,
      ...row.adapter.slice(1),
    ]);
    const numpy = row.numpy === null ? null : await start('NumPy/SciPy', python, script(row.numpy));
    const cpp =
      row.cpp === null || !settings.cpp
        ? null
        : await start('C++', compileLimit(row.cpp[0], data), [data, ...row.cpp.slice(1)]);
    const numpyItems = Math.min(items, row.numpyItems ?? items);
    const shared = numpy === null ? items : numpyItems;
    const reference =
      row.reference === undefined ? null : await start('the reference', python, script(row.reference));
    await checkAnswers(row, data, shared, reference ?? numpy, [ours, numpy, cpp]);
    await reference?.stop();

    const sizes = row.growsIn === null ? [items] : [items, even(items / 2), even(items / 4)];
    const turns = [
      ...sizes.map((size) => createTurn(ours, size)),
      createTurn(numpy, numpyItems),
      createTurn(cpp, items),
    ];
    const [whole] = turns;
    ours.forgetPeak();
    for (let pass = 0; pass <= passes; pass++) {
      // The first round warms up: compiled code, pages and caches.
      for (const turn of turns) await turn.run(pass > 0);
    }
    const rateOf = (turn: Turn): number => turn.items / turn.seconds();
    const ratioTo = (turn: Turn): number | null => (turn.present ? rateOf(whole!) / rateOf(turn) : null);
    return {
      name: row.name,
      kernel: row.kernel,
      rate: rateOf(whole!) / row.per,
      unit: row.unit,
      ratioNumpy: ratioTo(turns.at(-2)!),
      ratioCpp: ratioTo(turns.at(-1)!),
      peakMB: ours.peakMB(),
      growth:
        row.growsIn === null
          ? null
          : growthExponent(
              turns.slice(0, sizes.length).map((t) => ({ items: t.items, seconds: t.seconds() })),
            ),
    };
  } finally {
    for (const contender of contenders) await contender.stop();
    rmSync(data, { recursive: true, force: true });
  }
}

async function checkAnswers(
  row: KernelRow,
  folder: string,
  items: number,
  trusted: Contender | null,
  others: readonly (Contender | null)[],
): Promise<void> {
  const answerOf = async (contender: Contender): Promise<Float64Array> => {
    await contender.pass(items);
    return contender.answer(join(folder, 'answer'));
  };
  if (trusted === null) throw new Error(`${row.name} has nothing to be compared with.`);
  const expected = await answerOf(trusted);
  for (const other of others) {
    if (other === null || other === trusted) continue;
    assertSameAnswer(`${row.kernel}: ${other.name}`, await answerOf(other), expected, row);
  }
}

interface Turn {
  present: boolean;
  items: number;
  run(counts: boolean): Promise<void>;
  seconds(): number;
}

function createTurn(contender: Contender | null, items: number): Turn {
  const passes: Pass[] = [];
  return {
    present: contender !== null,
    items,
    async run(counts) {
      const pass = await contender?.pass(items);
      if (counts && pass !== undefined) passes.push(pass);
    },
    seconds: () => median(passes.map(({ cpu }) => cpu)),
  };
}

/** Lists come in twos, so every size is even. */
function even(items: number): number {
  return 2 * Math.max(1, Math.round(items / 2));
}
