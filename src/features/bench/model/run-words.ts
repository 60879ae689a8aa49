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

/** "5.1 M pairs kept, 46.0 MB"; null where none are, which the engine says in a sentence of its own. */
export function pairsWords(pairs: PairsKept): string | null {
  return pairs.kept === null ? null : `${shortCount(pairs.kept)} pairs kept, ${bytesWords(pairs.bytes)}`;
}

/** What the job log says of a run that is done. */
export function doneWords(study: string, seconds: number, pairs: PairsKept | undefined): string {
  const done = `${study} done in ${durationWords(seconds)}`;
  if (pairs === undefined) return `${done}.`;
  return pairs.kept === null ? `${done}. ${pairs.why}` : `${done}; ${pairsWords(pairs)}.`;
}

/** "41.2 MB, about 3 s": what reading the inputs again takes. */
export function costWords({ bytes, seconds }: ReadingCost): string {
  const long = seconds === null ? '' : `, about ${durationWords(Math.max(0.1, seconds))}`;
  return `${bytesWords(bytes)}${long}`;
}
