import type { Verdict, VerdictLevel } from '../../../shared/contracts/output';
import { pairVariants, VARIANT_WORDS } from './quantity-words';

const LEVEL_WORDS: Record<VerdictLevel, string> = {
  violated: 'violated',
  indicated: 'indicated',
  inconclusive: 'inconclusive',
  'not-violated': 'not violated',
};

/** The verdicts as sentences, each with its level in words and its number of standard deviations. */
export function VerdictList({ verdicts }: { verdicts: Record<string, Verdict> }) {
  return (
    <ul className="flex flex-col gap-2">
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
                  <span className="flex items-baseline justify-between gap-3">
                    <span className="text-text">
                      {row.label}
                      {variant === null ? '' : `, ${VARIANT_WORDS[variant]}`}
                    </span>
                    <span className="font-mono text-xs text-dim whitespace-nowrap">
                      {LEVEL_WORDS[verdict.level]} · {verdict.significance.toFixed(1)} σ
                    </span>
                  </span>
                  <span className="block text-dim">{verdict.sentence}</span>
                </li>,
              ],
        ),
      )}
    </ul>
  );
}
