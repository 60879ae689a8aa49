import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Inspection } from '../../shared/contracts/engine';
import { type TextLayout, textLayoutSchema } from '../../shared/contracts/layout';
import { inspectSource, openReader } from '../../workers/formats/registry';
import { afterLineEnds, countLineEnds } from '../../workers/formats/text/line-ends';
import { nodeEnvironment } from '../../workers/pipeline/hdf5-node';
import { makeFolder, memorySource, problemOf, readTags, type Tags } from './support/sources';
import { bytesOf, textLayout } from './support/text';

async function read(text: string, parts: Partial<TextLayout> = {}, cuts: number[] = []): Promise<Tags> {
  return readTags(await openReader(memorySource(bytesOf(text)), textLayout(parts), nodeEnvironment), cuts);
}

async function inspect(text: string): Promise<Inspection & { layout: TextLayout }> {
  const inspection = await inspectSource(memorySource(bytesOf(text), 'run.txt'), null, nodeEnvironment);
  return { ...inspection, layout: textLayoutSchema.parse(inspection.layout) };
}

/** Ticks by long arithmetic on the text alone: the twin of the reader. Halves go up. */
function slowTicks(text: string, unitFs: bigint, tickFs: bigint): bigint {
  const [, sign, whole = '', fraction = '', power = '0'] =
    /^([+-]?)(\d*)(?:[.,](\d*))?(?:e([+-]?\d+))?$/i.exec(text)!;
  const exponent = BigInt(power) - BigInt(fraction.length);
  const digits = BigInt(whole + fraction) * (sign === '-' ? -1n : 1n);
  const numerator = digits * unitFs * (exponent > 0n ? 10n ** exponent : 1n);
  const denominator = tickFs * (exponent < 0n ? 10n ** -exponent : 1n);
  const doubled = 2n * numerator + denominator;
  const quotient = doubled / (2n * denominator);
  return doubled % (2n * denominator) < 0n ? quotient - 1n : quotient;
}

describe('lines', () => {
  it('are counted and found as a plain scan does, wherever the bytes are cut', () => {
    const bytes = fc.array(fc.constantFrom(10, 13, 32, 48, 0x8a, 0x8d, 0x0b, 0), { maxLength: 80 });
    fc.assert(
      fc.property(bytes, fc.nat(80), fc.boolean(), (given, cut, afterCr) => {
        const all = Uint8Array.from(given);
        const starts: number[] = [];
        let was = afterCr;
        given.forEach((byte, i) => {
          if (byte === 13 || (byte === 10 && !was))
            starts.push(byte === 13 && given[i + 1] === 10 ? i + 2 : i + 1);
          was = byte === 13;
        });
        expect(countLineEnds(all, afterCr)).toBe(starts.length);
        const head = all.subarray(0, cut);
        const wasCr = head.length > 0 ? head.at(-1) === 13 : afterCr;
        expect(countLineEnds(head, afterCr) + countLineEnds(all.subarray(cut), wasCr)).toBe(starts.length);
        expect(starts.map((_, i) => afterLineEnds(all, i + 1, afterCr))).toEqual(starts);
        expect(afterLineEnds(all, starts.length + 1, afterCr)).toBe(-1);
      }),
      { numRuns: 300 },
    );
  });

  it.each(['\n', '\r\n', '\r'])('end with %j, or with the file', async (end) => {
    const lines = ['5,1', '7,2', '# a remark', '', '  9 , 3  ', '11,4,more'];
    const wanted = { ticks: [5n, 7n, 9n, 11n], channels: [1, 2, 3, 4] };
    expect(await read(lines.join(end), {}, [1, 2, 3, 4, 5])).toEqual(wanted);
    expect(await read(lines.join(end) + end, {}, [3])).toEqual(wanted);
  });

  it('of mixed ends are each a record', async () => {
    const text = '1,0\r2,0\n3,0\r\n4,0\r\r\n5,0\n\r6,0';
    expect((await read(text, {}, [1, 2, 3, 4, 5])).ticks).toEqual([1n, 2n, 3n, 4n, 5n, 6n]);
  });

  it('give the same tags for any split, across pages and slices', async () => {
    const count = 400_000;
    const ticks = Array.from({ length: count }, (_, i) => BigInt(i) * 7_654_321_987n);
    const lines = ticks.map((tick, i) => `${i % 9 === 0 ? '  ' : ''}${tick},${i % 300}`);
    const text = `time,channel\r\n${lines.join('\r\n')}\r\n`;
    expect(text.length).toBeGreaterThan(5 * 2 ** 20);
    const layout = textLayout({ headerLines: 1 });
    const reader = await openReader(memorySource(bytesOf(text)), layout, nodeEnvironment);
    expect(reader.facts).toMatchObject({ records: count });
    const wanted = { ticks, channels: ticks.map((_, i) => i % 300) };
    expect(await readTags(reader)).toEqual(wanted);
    expect(await readTags(reader, [1, 70_000, 70_001, 262_144, 333_333])).toEqual(wanted);
  });
});

describe('times are exact', () => {
  it('over a day in seconds with twelve decimals, at 1 ps', async () => {
    const times = [
      '0.000000000001',
      '43200.999999999999',
      '86399.123456789013',
      '86399.999999999999',
      '86400',
    ];
    const text = times.map((time, i) => `${time};${i}`).join('\n');
    const wanted = [
      1n,
      43_200_999_999_999_999n,
      86_399_123_456_789_013n,
      86_399_999_999_999_999n,
      86_400n * 10n ** 12n,
    ];
    expect((await read(text, { delimiter: 'semicolon', timeUnitFs: 1e15 })).ticks).toEqual(wanted);
  });

  it('as whole ticks past 2^53, up and down', async () => {
    const times = ['9007199254740993', '9223372036854775807', '3', '-9223372036854775808', '+12'];
    expect((await read(times.map((time) => `${time},0`).join('\n'))).ticks).toEqual(times.map(BigInt));
  });

  it('whatever the digits, exponent, unit and tick', async () => {
    const digits = (most: number) => fc.stringMatching(new RegExp(`^\\d{1,${most}}$`));
    const time = fc
      .tuple(
        fc.constantFrom('', '-', '+'),
        digits(9),
        fc.option(digits(14), { nil: '' }),
        fc.option(fc.integer({ min: -6, max: 3 }), { nil: null }),
      )
      .map(
        ([sign, whole, fraction, power]) =>
          `${sign}${whole}${fraction === '' ? '' : `.${fraction}`}${power === null ? '' : `e${power}`}`,
      );
    const scale = fc.constantFrom(
      [1000, 1000],
      [1e15, 1000],
      [1e15, 81_000],
      [1e6, 1],
      [1, 15_625],
      [1e12, 250],
    );
    await fc.assert(
      fc.asyncProperty(fc.array(time, { minLength: 1, maxLength: 8 }), scale, async (times, [unit, tick]) => {
        const text = times.map((each) => `${each} 1`).join('\n');
        const parts = { delimiter: 'space', timeUnitFs: unit!, tickFs: tick! } as const;
        const wanted = times.map((each) => slowTicks(each, BigInt(unit!), BigInt(tick!)));
        if (wanted.some((tick) => tick >= 2n ** 63n || tick < -(2n ** 63n))) {
          const problem = await problemOf(() => read(text, parts), 'wrong-type');
          expect(problem.message).toContain('within 2^63 ticks');
        } else expect((await read(text, parts)).ticks).toEqual(wanted);
      }),
      { numRuns: 400 },
    );
  });

  it('with a tick that is no whole number of femtoseconds, as its decimal text says', async () => {
    const parts = { timeUnitFs: 1e6, tickFs: 15.625 };
    expect((await read('1,0\n0.0000234375,0\n-0.0000234375,0', parts)).ticks).toEqual([64_000n, 2n, -1n]);
  });

  it('rounded halves upwards, so that a shift never changes the rounding', async () => {
    const text = '0.5,0\n1.5,0\n2.5,0\n-0.5,0\n-1.5,0\n1.5e-3,0\n1500e-3,0';
    expect((await read(text)).ticks).toEqual([1n, 2n, 3n, 0n, -1n, 0n, 2n]);
  });
});

describe('columns', () => {
  it.each([
    ['comma', '1.5,x,3\n', { timeUnitFs: 2000 }],
    ['semicolon', '1,5;x;3\n', { decimal: 'comma', timeUnitFs: 2000 }],
    ['tab', '1.5\tx y\t3\n', { timeUnitFs: 2000 }],
    ['tab', ' 1.5 \t\t 3 \n', { timeUnitFs: 2000 }],
    ['space', '  1.5 \t x   3\n', { timeUnitFs: 2000 }],
    ['comma', '"1.5","a, b",3\n', { timeUnitFs: 2000 }],
    ['semicolon', ' "1.5" ; "a;b" ; "3" \n', { timeUnitFs: 2000 }],
    ['comma', '1.5,x,3.0\n', { timeUnitFs: 2000 }],
    ['comma', '1.5,x,3.000e+00,"never closed\n', { timeUnitFs: 2000 }],
  ] as const)('between %s: %j', async (delimiter, line, parts) => {
    const tags = await read(line.repeat(3), { delimiter, channelColumn: 2, ...parts });
    expect(tags).toEqual({ ticks: [3n, 3n, 3n], channels: [3, 3, 3] });
  });

  it('may stand the other way round, far to the right', async () => {
    const line = `${'7,'.repeat(250)}65535,0,0,12\n`;
    const tags = await read(line.repeat(2), { timeColumn: 253, channelColumn: 250 });
    expect(tags).toEqual({ ticks: [12n, 12n], channels: [65_535, 65_535] });
  });
});

describe('a layout is proposed', () => {
  const runs = (f: (i: number) => string, count = 60): string =>
    Array.from({ length: count }, (_, i) => f(i)).join('');

  it('for a spreadsheet: semicolons, decimal commas, a byte-order mark, CRLF', async () => {
    const text = `\uFEFFNr;Zeit [ns];Kanal\r\n${runs((i) => `${i};${i * 12},${String(i % 10)}25;${i % 3}\r\n`)}`;
    const { layout, because, facts, warnings } = await inspect(text);
    expect(layout).toEqual(
      textLayout({
        delimiter: 'semicolon',
        decimal: 'comma',
        headerLines: 1,
        timeColumn: 1,
        channelColumn: 2,
        timeUnitFs: 1e6,
        tickFs: 1000,
      }),
    );
    expect(because).toBe(
      'Read as text with semicolons between columns and a decimal comma, column 2 ("Zeit [ns]") never falls over the first 60 lines and column 3 ("Kanal") holds 3 whole numbers up to 2; its heading names the unit ns.',
    );
    expect(warnings).toEqual([]);
    if (facts.kind !== 'tags') throw new Error('expected tags');
    expect(facts).toMatchObject({ records: 60, first: { length: 20 } });
    expect(facts.first[1]).toEqual({ tick: '12125', channel: 1 });
    const tags = await readTags(await openReader(memorySource(bytesOf(text)), layout, nodeEnvironment));
    expect(tags.ticks[7]).toBe(84_725n);
  });

  it.each([
    ['time (ps),channel', 1000, 1000],
    ['time_ns,ch', 1e6, 1e6],
    ['t [us],detector', 1e9, 1e9],
    ['t,c', 1000, 1000],
  ])('from the heading %j', async (heading, timeUnitFs, tickFs) => {
    const { layout, warnings } = await inspect(`${heading}\n${runs((i) => `${i * i},${i % 2}\n`)}`);
    expect(layout).toEqual(textLayout({ headerLines: 1, timeUnitFs, tickFs }));
    expect(warnings.length).toBe(heading === 't,c' ? 1 : 0);
  });

  it('without a heading, with the channel first, and says what it cannot know', async () => {
    const { layout, warnings } = await inspect(runs((i) => `${i % 5}\t${1000 + 17 * i}\n`));
    expect(layout).toEqual(textLayout({ delimiter: 'tab', timeColumn: 1, channelColumn: 0 }));
    expect(warnings).toEqual([expect.stringContaining('1 ps is proposed')]);
  });

  it('by what the heading names where several columns would do', async () => {
    const text = `event,channel,time\n${runs((i) => `${3 * i},${i % 4},${5 * i}\n`)}`;
    expect((await inspect(text)).layout).toMatchObject({ timeColumn: 2, channelColumn: 1 });
    const nameless = await inspect(runs((i) => `${3 * i},${i % 4},${5 * i},${i % 7}\n`));
    expect(nameless.warnings.join(' ')).toContain('Columns 1, 3 all rise');
    expect(nameless.warnings.join(' ')).toContain('Columns 2, 4 all hold few whole numbers');
  });

  it('for remarks before and between', async () => {
    const text = `# made up\n# time [s] channel\n${runs((i) => `${(i * 1e-6).toFixed(12)} ${i % 2}\n${i === 9 ? '# pause\n' : ''}`)}`;
    const { layout, facts } = await inspect(text);
    expect(layout).toEqual(textLayout({ delimiter: 'space', timeUnitFs: 1e15 }));
    expect(facts).toMatchObject({ records: 63, channels: [{ count: 30 }, { count: 30 }] });
  });

  it('what numpy and the csv module of Python write', async () => {
    const folder = await makeFolder();
    const script = `
import csv, sys, numpy
folder = sys.argv[1]
times = [i * 123456789 + (i % 7) for i in range(500)]
channels = [i % 4 for i in range(500)]
numpy.savetxt(folder + '/default.txt', numpy.column_stack([times, channels]))
numpy.savetxt(folder + '/whole.txt', numpy.column_stack([times, channels]), fmt='%d', header='time (ps) channel')
numpy.savetxt(folder + '/seconds.csv', numpy.column_stack([numpy.array(times) * 1e-12, channels]), fmt=['%.12f', '%d'], delimiter=',', header='time_s,channel', comments='')
with open(folder + '/excel.csv', 'w', newline='') as f:
    w = csv.writer(f, dialect='excel', quoting=csv.QUOTE_ALL)
    w.writerow(['time, ps'.replace(',', ''), 'channel'])
    w.writerows(zip(times, channels))
`;
    try {
      execFileSync('/usr/bin/python3', ['-c', script, folder.path('')]);
      const wanted = {
        ticks: Array.from({ length: 500 }, (_, i) => BigInt(i * 123_456_789 + (i % 7))),
        channels: Array.from({ length: 500 }, (_, i) => i % 4),
      };
      for (const name of ['default.txt', 'whole.txt', 'seconds.csv', 'excel.csv']) {
        const bytes = readFileSync(folder.path(name));
        const { layout } = await inspectSource(memorySource(bytes, name), null, nodeEnvironment);
        expect(layout, name).not.toBeNull();
        const reader = await openReader(memorySource(bytes, name), layout!, nodeEnvironment);
        expect(await readTags(reader, [100]), name).toEqual(wanted);
      }
    } finally {
      await folder.remove();
    }
  });

  it('not for text that holds no tags', async () => {
    const inspection = await inspectSource(
      memorySource(bytesOf('7.5,-3.25\n2.5,-4.5\n9.5,0.25\n1.5,8\n'.repeat(9))),
      null,
      nodeEnvironment,
    );
    expect(inspection).toMatchObject({ layout: null, reader: 'text' });
  });
});
