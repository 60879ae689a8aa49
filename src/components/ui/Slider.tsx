import { Slider as RadixSlider } from 'radix-ui';

export interface SliderProps {
  value: number;
  min: number;
  max: number;
  step: number;
  /** Every move of the hand. */
  onChange(value: number): void;
  /** When the hand lets go: the point to remember for undo. */
  onCommit?(value: number): void;
  'aria-label': string;
  /** The value with its unit, for screen readers. */
  valueText?: string;
  disabled?: boolean;
}

export function Slider({
  value,
  min,
  max,
  step,
  onChange,
  onCommit,
  valueText,
  disabled,
  ...aria
}: SliderProps) {
  return (
    <RadixSlider.Root
      value={[value]}
      min={min}
      max={max}
      step={step}
      disabled={disabled}
      onValueChange={([next]) => next !== undefined && onChange(next)}
      onValueCommit={([next]) => next !== undefined && onCommit?.(next)}
      className="relative flex h-4 w-full touch-none items-center select-none"
    >
      <RadixSlider.Track className="relative h-px grow bg-control">
        <RadixSlider.Range className="absolute h-full bg-text" />
      </RadixSlider.Track>
      <RadixSlider.Thumb
        {...aria}
        aria-valuetext={valueText}
        className="block h-3 w-[3px] bg-text hover:w-[5px] data-disabled:bg-faint"
      />
    </RadixSlider.Root>
  );
}
