import type { RunEvent } from '../../shared/contracts/engine';

/** Adds up what the tasks of one stage report and tells the page, at most ten times a second. */
export interface StageProgress {
  add(bytes: number, records: number): void;
  readonly fraction: number;
  finish(): void;
}

const TELL_EVERY_MS = 100;
/** Before this a rate is noise, so no time left is promised. */
const RATE_AFTER_MS = 300;

export function createStage(
  jobId: string,
  stage: string,
  bytesTotal: number,
  emit: (event: RunEvent) => void,
  counted: 'records' | 'frames' = 'records',
  now: () => number = () => performance.now(),
): StageProgress {
  const startedAt = now();
  let toldAt = Number.NEGATIVE_INFINITY;
  let bytesDone = 0;
  let recordsDone = 0;
  const tell = (): void => {
    const elapsedMs = now() - startedAt;
    toldAt = now();
    const steady = elapsedMs >= RATE_AFTER_MS && bytesDone > 0;
    emit({
      kind: 'progress',
      jobId,
      stage,
      bytesDone,
      bytesTotal,
      counted,
      recordsDone,
      recordsPerSecond: elapsedMs > 0 ? (recordsDone / elapsedMs) * 1000 : 0,
      secondsLeft: steady ? Math.max(0, ((bytesTotal - bytesDone) / bytesDone) * (elapsedMs / 1000)) : null,
    });
  };
  tell();
  return {
    add(bytes, records) {
      bytesDone = Math.min(bytesTotal, bytesDone + bytes);
      recordsDone += records;
      if (now() - toldAt >= TELL_EVERY_MS) tell();
    },
    get fraction() {
      return bytesTotal > 0 ? bytesDone / bytesTotal : 0;
    },
    finish: tell,
  };
}
