import type { DialValue } from '../../../shared/contracts/dial';
import type { InputProvenance, RunResult } from '../../../shared/contracts/engine';
import type { ResultFile } from '../../../shared/contracts/result';
import { formatPlain } from '../../lib/format-number';
import { isRegion } from './dial-marks';
import { describeDetector, describeLayout, describePlane } from './input-words';
import { bytesWords, durationWords } from './reading-words';

/** Of a finished run or a stored result. */
export type Provenance = RunResult['provenance'] | ResultFile['provenance'];

function dialWords(value: DialValue): string {
  if (value === null) return 'left to the study';
  if (isRegion(value)) return `x ${value.x0} to ${value.x1}, y ${value.y0} to ${value.y1}`;
  return typeof value === 'number' ? formatPlain(value) : value;
}

/** Where the numbers came from: files by fingerprint, how they were read, dials, engine, seed. */
export function ProvenanceText({ provenance }: { provenance: Provenance }) {
  const { inputs, dials, engine, seed, startedAt, seconds } = provenance;
  const preset = 'preset' in provenance ? provenance.preset : null;
  return (
    <div className="flex flex-col gap-2 font-mono text-xs text-dim">
      {inputs.map((input, place) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: the files of a sequence share their name and may share their bytes
        <InputText key={place} input={input} />
      ))}
      <details>
        <summary className="min-h-6 cursor-pointer py-1">dials</summary>
        <dl className="mt-1 grid grid-cols-[auto_1fr] gap-x-3">
          {Object.entries(dials).map(([id, value]) => (
            <div key={id} className="contents">
              <dt>{id}</dt>
              <dd className="text-text">{dialWords(value)}</dd>
            </div>
          ))}
        </dl>
      </details>
      <p>
        {preset === null
          ? ''
          : `preset ${preset.name}${preset.version === null ? '' : ` v${preset.version}`} · `}
        engine {engine} · seed {seed} · {startedAt.replace('T', ' ').slice(0, 19)} UTC ·{' '}
        {durationWords(seconds)}
      </p>
    </div>
  );
}

function InputText({ input }: { input: InputProvenance }) {
  const { name, fileName, sha256, bytes, layout, detector, plane } = input;
  return (
    <div>
      <p>
        <span className="text-text">{fileName}</span> as {name} · {bytesWords(bytes)}
      </p>
      <p className="break-all">sha-256 {sha256}</p>
      <p className="wrap-anywhere">
        {[
          ...describeLayout(layout),
          ...describeDetector(detector),
          ...(plane === null ? [] : describePlane(plane)),
        ].join(' · ')}
      </p>
    </div>
  );
}
