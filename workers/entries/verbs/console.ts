import type { RunEvent } from '../../../shared/contracts/engine';

/** stdout carries JSON only, everything said to a person goes to stderr. */
export interface Console {
  json(value: unknown): Promise<void>;
  say(line: string): void;
}

export const processConsole: Console = {
  // A pipe takes more than one write; leaving before the last would cut the JSON.
  json: (value) =>
    new Promise((resolve, reject) => {
      process.stdout.write(`${JSON.stringify(value, null, 2)}\n`, (error) =>
        error ? reject(error) : resolve(),
      );
    }),
  say: (line) => {
    process.stderr.write(`${line}\n`);
  },
};

/** Progress for people: one line that rewrites itself on a terminal, one line every two seconds elsewhere. */
export function createProgressLine(): { show(event: RunEvent): void; end(): void } {
  const live = process.stderr.isTTY === true;
  let toldAt = 0;
  let shown = false;
  return {
    show(event) {
      if (event.kind !== 'progress') return;
      if (!live && Date.now() - toldAt < 2000) return;
      toldAt = Date.now();
      const text = describe(event);
      process.stderr.write(live ? `\r\x1b[2K${text}` : `${text}\n`);
      shown = true;
    },
    end() {
      if (live && shown) process.stderr.write('\r\x1b[2K');
    },
  };
}

function describe(event: Extract<RunEvent, { kind: 'progress' }>): string {
  const percent = event.bytesTotal > 0 ? Math.floor((100 * event.bytesDone) / event.bytesTotal) : 100;
  const rate = event.recordsPerSecond > 0 ? `, ${shortRate(event.recordsPerSecond)} ${event.counted}/s` : '';
  const left = event.secondsLeft === null ? '' : `, ${Math.ceil(event.secondsLeft)} s left`;
  return `${event.stage}: ${percent} %${rate}${left}`;
}

function shortRate(perSecond: number): string {
  return perSecond >= 1e5 ? `${(perSecond / 1e6).toFixed(2)} M` : perSecond.toFixed(0);
}
