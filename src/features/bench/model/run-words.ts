import type { PairsKept } from '../../../../shared/contracts/engine';
import { bytesWords, durationWords, shortCount } from '../../../components/output/reading-words';
import type { Progress } from './bench-types';
import type { ReadingCost } from './run-cost';

/** Short, for the line beside the studies: how far, how fast, how long. */
export function progressWords({
  bytesDone,
  bytesTotal,
  counted,
  recordsPerSecond,
  secondsLeft,
}: Progress): string {
  const share = bytesTotal > 0 ? `${Math.floor((100 * bytesDone) / bytesTotal)} %` : '';
  const rate = recordsPerSecond > 0 ? `${shortCount(recordsPerSecond)} ${counted}/s` : '';
  const left = secondsLeft === null ? '' : `${durationWords(secondsLeft)} left`;
  return [share, rate, left].filter((part) => part !== '').join(' · ');
}

/** Long, for the ledger: what is going on and how much was read. */
export function stageWords({ stage, counted, recordsDone, bytesDone, bytesTotal }: Progress): string {
  return `${stage} · ${shortCount(recordsDone)} ${counted} · ${bytesWords(bytesDone)} of ${bytesWords(bytesTotal)}`;
}

/** "5.1 M pairs kept, 46.0 MB", or why none are. */
export function pairsWords(pairs: PairsKept): string {
  if (pairs.kept === null) return `pairs not kept: ${pairs.why}`;
  return `${shortCount(pairs.kept)} pairs kept, ${bytesWords(pairs.bytes)}`;
}

/** "41.2 MB, about 3 s": what reading the inputs again takes. */
export function costWords({ bytes, seconds }: ReadingCost): string {
  const long = seconds === null ? '' : `, about ${durationWords(Math.max(0.1, seconds))}`;
  return `${bytesWords(bytes)}${long}`;
}
