// @vitest-environment jsdom
import { fireEvent, render, screen } from '@testing-library/react';
import { useState } from 'react';
import { describe, expect, it, vi } from 'vitest';
import { CheckMark } from '../../../../src/components/ui/CheckMark';
import { Field, TextInput } from '../../../../src/components/ui/Field';
import { NumberField, type NumberFieldProps } from '../../../../src/components/ui/NumberField';
import { ProgressBar } from '../../../../src/components/ui/ProgressBar';
import { parseNumber, stepNumber } from '../../../../src/components/ui/parse-number';
import { stageOf } from './stage';

stageOf(300, 200);

function Held(props: Partial<NumberFieldProps> & { seen(value: number): void }) {
  const [value, setValue] = useState(1.4);
  const onChange = (next: number): void => {
    props.seen(next);
    setValue(next);
  };
  return (
    <NumberField
      label="Window"
      unit="ns"
      step={0.1}
      min={0}
      max={4}
      {...props}
      value={value}
      onChange={onChange}
    />
  );
}

describe('NumberField', () => {
  it('commits on Enter and steps with the arrows', () => {
    const seen = vi.fn();
    render(<Held seen={seen} />);
    const input = screen.getByRole('textbox', { name: 'Window' }) as HTMLInputElement;
    fireEvent.change(input, { target: { value: '2,5' } });
    expect(seen).not.toHaveBeenCalled();
    fireEvent.keyDown(input, { key: 'Enter' });
    expect(seen).toHaveBeenLastCalledWith(2.5);
    fireEvent.keyDown(input, { key: 'ArrowUp' });
    expect(seen).toHaveBeenLastCalledWith(2.6);
    fireEvent.keyDown(input, { key: 'ArrowUp', shiftKey: true });
    expect(seen).toHaveBeenLastCalledWith(3.6);
    expect(input.value).toBe('3.6');
  });

  it('says what is wrong, keeps what was typed, and Escape brings the value back', () => {
    const seen = vi.fn();
    render(<Held seen={seen} />);
    const input = screen.getByRole('textbox') as HTMLInputElement;
    fireEvent.change(input, { target: { value: '9' } });
    fireEvent.blur(input);
    expect(screen.getByRole('alert').textContent).toBe('At most 4, not 9.');
    expect(input.getAttribute('aria-invalid')).toBe('true');
    expect(input.value).toBe('9');
    fireEvent.keyDown(input, { key: 'Escape' });
    expect(input.value).toBe('1.4');
    expect(seen).not.toHaveBeenCalled();
  });
});

describe('parseNumber', () => {
  it.each([
    ['1,4', 1.4],
    ['\u22123', -3],
    ['1\u2009000', 1000],
    ['2e-3', 0.002],
  ])('takes %s', (text, value) => {
    expect(parseNumber(text, {})).toEqual({ ok: true, value });
  });

  it.each(['', 'abc', 'NaN', 'Infinity', '1.5.2'])('refuses "%s"', (text) => {
    expect(parseNumber(text, {}).ok).toBe(false);
  });

  it('holds whole numbers and limits', () => {
    expect(parseNumber('1.5', { integer: true }).ok).toBe(false);
    expect(parseNumber('-1', { min: 0 }).ok).toBe(false);
    expect(stepNumber(0.2, 0.1, {})).toBe(0.3);
    expect(stepNumber(3.95, 0.1, { max: 4 })).toBe(4);
  });
});

describe('small parts', () => {
  it('ties label, hint and error to the control', () => {
    render(
      <Field label="E-mail" hint="Where the invitation goes." error="Write an address.">
        {(control) => <TextInput {...control} />}
      </Field>,
    );
    const ids = screen.getByLabelText('E-mail').getAttribute('aria-describedby')?.split(' ') ?? [];
    expect(ids.map((id) => document.getElementById(id)?.textContent)).toEqual([
      'Where the invitation goes.',
      'Write an address.',
    ]);
  });

  it('tells progress by value, or that its end is unknown', () => {
    const { rerender } = render(<ProgressBar value={0.71} label="Reading" />);
    expect(screen.getByRole('progressbar', { name: 'Reading' }).getAttribute('aria-valuenow')).toBe('71');
    rerender(<ProgressBar value={null} label="Reading" />);
    expect(screen.getByRole('progressbar').getAttribute('aria-valuenow')).toBeNull();
  });

  it('gives each status a shape and a word', () => {
    const shapes = (['pass', 'caution', 'fail'] as const).map((status) => {
      const { container, unmount } = render(<CheckMark status={status} />);
      const shape = container.querySelector('svg')?.innerHTML;
      expect(container.textContent).toBe(status);
      unmount();
      return shape;
    });
    expect(new Set(shapes).size).toBe(3);
  });
});
