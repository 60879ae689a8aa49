import type { Verdict } from '../../../shared/contracts/output';
import { LEVEL_WORDS, pairVariants, VARIANT_WORDS } from './quantity-words';

/** The verdicts as sentences, each with its level in words and its number of standard deviations. */
export function VerdictList({ verdicts }: { verdicts: Record<string, Verdict> }) {
  return (
    <ul className="flex flex-col gap-0.5">
      {pairVariants(verdicts).flatMap((row) =>
        (
          [
            ['net', row.net],
            ['raw', row.raw],
            [null, row.only],
          ] as const
        ).flatMap(([variant, verdict]) =>
          verdict === null
            ? []
            : [
                <li key={`${row.base}.${variant}`} className="text-sm">
                  <details>
                    <summary className="flex min-h-6 cursor-pointer items-center justify-between gap-3 hover:bg-raised">
                      <span>
                        {row.label}
                        {variant === null ? '' : `, ${VARIANT_WORDS[variant]}`}
                      </span>
                      <span className="font-mono text-xs text-dim whitespace-nowrap">
                        {LEVEL_WORDS[verdict.level]} · {verdict.significance.toFixed(1)} σ
                      </span>
                    </summary>
                    <p className="py-1 text-dim">
                      {verdict.sentence} Linear: {verdict.significanceLinear.toFixed(1)} σ.
                    </p>
                  </details>
                </li>,
              ],
        ),
      )}
    </ul>
  );
}
