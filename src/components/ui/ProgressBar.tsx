import { Progress } from 'radix-ui';

export interface ProgressBarProps {
  /** 0 to 1; null when the end is not known. */
  value: number | null;
  /** What progresses, e.g. "Reading far-1211.h5". */
  label: string;
}

/** A hairline that fills. The figure belongs beside it, in words. */
export function ProgressBar({ value, label }: ProgressBarProps) {
  const share = value === null ? null : Math.min(1, Math.max(0, value));
  const percent = share === null ? null : Math.round(share * 100);
  return (
    <Progress.Root
      value={percent}
      max={100}
      aria-label={label}
      getValueLabel={(done) => `${done} %`}
      className="relative h-[3px] w-full overflow-hidden bg-line"
    >
      <Progress.Indicator
        className={`h-full origin-left bg-text ${share === null ? 'w-1/3 animate-pulse' : 'w-full'}`}
        style={share === null ? undefined : { transform: `scaleX(${share})` }}
      />
    </Progress.Root>
  );
}
