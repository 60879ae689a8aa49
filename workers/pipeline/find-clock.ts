import type { CancelToken, Reader } from '../../shared/contracts/reader';
import { Cancelled, Problem } from '../../shared/errors/problem';
import { type ClockFile, clockSearches, matchClocks, offsetAtZero } from '../../shared/physics/clock-match';
import { buildTimeIndex, pageWhere, readPage, type TimeIndex } from '../formats/time-index';
import type { ClockFacts } from '../studies/study';
import { type InputPlatform, openCompanion, openMain, type ReadInput } from './read-input';

/** Tags may come so much late in a file. */
const disorderPs = 5e9;

/**
 * The clock of the second file of an input against that of the first, from the coincidences between them. Clocks that
 * were set agree about their zeros, others at most about when they were started: both are tried.
 * @throws Problem `bad-input` when no coincidences stand out: then no number is made up.
 */
export async function findClock(
  input: ReadInput,
  platform: InputPlatform,
  token: CancelToken,
  onBytes: (bytes: number) => void,
): Promise<ClockFacts> {
  const opened: Reader[] = [];
  try {
    opened.push(await openMain(input, platform));
    opened.push(await openCompanion(input, platform));
    const main = await buildTimeIndex(opened[0]!, token, onBytes);
    const companion = await buildTimeIndex(opened[1]!, token, onBytes);
    const firsts = [main, companion].map((index) => firstPs(index));
    const zeros = firsts[1]! - firsts[0]!;
    const guesses = Math.abs(zeros) < clockSearches[0]!.rangePs / 2 ? [zeros] : [zeros, 0];
    const match = await matchClocks(clockFile(main, token), clockFile(companion, token), guesses);
    if (match === null) throw noMatch(input);
    const { stretches, found, residualPs, chi2PerDof, peakSigmaPs } = match;
    return {
      offset: offsetAtZero(match, firsts[0]!, firsts[1]!),
      drift: match.drift,
      line: { stretches, found, residualPs, chi2PerDof, peakSigmaPs },
    };
  } finally {
    for (const reader of opened) await reader.close();
  }
}

function noMatch({ source, companion }: ReadInput): Problem {
  return new Problem(
    'bad-input',
    `Expected coincidences between ${source.name} and ${companion?.source.name} from which to find the offset of their clocks, found none that stand out within 5 s of offset and a drift of 1.2e-4; give offset and drift of the second clock by hand, or choose files of one acquisition.`,
    companion?.source.name ?? source.name,
  );
}

const firstPs = ({ firstTick, tickFs }: TimeIndex): number => (Number(firstTick ?? 0n) * tickFs) / 1000;

/** A file of tags as clicks in ps since the first. */
function clockFile(index: TimeIndex, token: CancelToken): ClockFile {
  const { firstTick, lastTick, tickFs, pages } = index;
  if (firstTick === null || lastTick === null) return { spanPs: 0, read: async () => new Float64Array(0) };
  const toPs = (ticks: number): number => (ticks * tickFs) / 1000;
  const tickAt = (ps: number): bigint => firstTick + BigInt(Math.floor((ps * 1000) / tickFs));
  return {
    spanPs: toPs(Number(lastTick - firstTick)),
    async read(fromPs, endPs) {
      const from = tickAt(fromPs);
      const behind = tickAt(endPs + disorderPs);
      const parts: Float64Array[] = [];
      for (let page = pageWhere(index, (tick) => tick < from); page < pages.length; page += 1) {
        if (token.cancelled) throw new Cancelled();
        const latest = pages[page]!.latestBefore;
        if (latest !== null && latest > behind) break;
        const { baseTick, deltaTick, count } = await readPage(index, page, token);
        const base = Number(baseTick - firstTick);
        parts.push(
          deltaTick
            .subarray(0, count)
            .map((delta) => toPs(base + delta))
            .filter((ps) => ps >= fromPs && ps < endPs),
        );
      }
      return join(parts).sort();
    },
  };
}

function join(parts: readonly Float64Array[]): Float64Array {
  const all = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    all.set(part, at);
    at += part.length;
  }
  return all;
}
