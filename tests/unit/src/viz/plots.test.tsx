// @vitest-environment jsdom
import { fireEvent, render, screen } from '@testing-library/react';
import { describe, expect, it, vi } from 'vitest';
import { BoundRuler } from '../../../../src/viz/BoundRuler';
import { grabBoxes } from '../../../../src/viz/BrushHandles';
import { HeatMap } from '../../../../src/viz/HeatMap';
import { LinePlot } from '../../../../src/viz/LinePlot';
import { RateStrip } from '../../../../src/viz/RateStrip';
import { smallHistogram, smallMap } from './maps';
import { stageOf } from './stage';

stageOf(520, 400);

const readout = (): string => document.querySelector('[data-readout]')?.textContent ?? '';

describe('HeatMap', () => {
  it('draws one rectangle a bin, hatches the masked one and tells itself in words', () => {
    render(<HeatMap map={smallMap()} theme="bench" note="pairs · raw" />);
    expect(document.querySelectorAll('.visx-heatmap-rect')).toHaveLength(12);
    expect(document.querySelector('[data-blank]')?.getAttribute('fill')).toMatch(/^url\(#/);
    expect(screen.getByRole('img', { name: /^Joint\. 4 by 3 bins/ })).toBeTruthy();
    expect(screen.getByText('x signal (µm)').getAttribute('fill')).toBe('var(--color-signal)');
    expect(screen.getByText('x idler (µm)').getAttribute('fill')).toBe('var(--color-idler)');
    expect(screen.getByText('pairs · raw')).toBeTruthy();
  });

  it('draws larger maps on a canvas', () => {
    const n = 100;
    const axes = smallMap().axes;
    render(
      <HeatMap
        map={smallMap({
          shape: [n, n],
          axes,
          data: new Float64Array(n * n),
          masked: undefined,
          sigma: undefined,
        })}
        theme="projector"
      />,
    );
    expect(document.querySelectorAll('canvas')).toHaveLength(1);
    expect(document.querySelectorAll('.visx-heatmap-rect')).toHaveLength(0);
  });

  it('moves the cursor with the arrow keys, reads it out and picks with Enter', () => {
    const [onCrosshair, onPick] = [vi.fn(), vi.fn()];
    render(<HeatMap map={smallMap()} theme="bench" onCrosshair={onCrosshair} onPick={onPick} />);
    const stage = screen.getByRole('application');
    fireEvent.keyDown(stage, { key: 'ArrowRight' });
    expect(onCrosshair).toHaveBeenLastCalledWith({ x: 5, y: 0 });
    fireEvent.keyDown(stage, { key: 'ArrowUp' });
    expect(onCrosshair).toHaveBeenLastCalledWith({ x: 5, y: 10 });
    expect(readout()).toContain('x signal 5 µm · x idler 10 µm · 10(3) pairs');
    expect(document.querySelector('[aria-live=polite]')?.textContent).toContain('10(3) pairs');
    fireEvent.keyDown(stage, { key: 'Enter' });
    expect(onPick).toHaveBeenCalledWith(2, 2);
    fireEvent.keyDown(stage, { key: 'Escape' });
    expect(onCrosshair).toHaveBeenLastCalledWith(null);
  });

  it('shows the linked cursor of its parent, and its own value there', () => {
    render(<HeatMap map={smallMap()} theme="bench" crosshair={{ x: -15, y: 10 }} />);
    expect(document.querySelector('[data-crosshair]')).toBeTruthy();
    expect(readout()).toContain('100(10) pairs');
  });

  it('draws a region with the pointer and with two Enters, in whole bins', () => {
    const onRegion = vi.fn();
    render(<HeatMap map={smallMap()} theme="bench" tool={{ label: 'bright region', onRegion }} />);
    const stage = screen.getByRole('application');
    expect(readout()).toContain('bright region');
    fireEvent.keyDown(stage, { key: 'ArrowLeft' });
    fireEvent.keyDown(stage, { key: 'Enter' });
    fireEvent.keyDown(stage, { key: 'ArrowRight' });
    expect(document.querySelector('[data-draft-region]')).toBeTruthy();
    fireEvent.keyDown(stage, { key: 'Enter' });
    expect(onRegion).toHaveBeenLastCalledWith({ x0: 0, y0: -5, x1: 20, y1: 5 });
    fireEvent.pointerDown(stage, { button: 0, clientX: 70, clientY: 290 });
    fireEvent.pointerMove(stage, { clientX: 200, clientY: 200 });
    fireEvent.pointerUp(stage, { clientX: 200, clientY: 200 });
    expect(onRegion).toHaveBeenCalledTimes(2);
    const region = onRegion.mock.lastCall?.[0];
    expect([region.x0 % 10, Math.abs(region.y0 % 10)]).toEqual([0, 5].map((v) => expect.closeTo(v)));
  });

  it('zooms with keys about the cursor and shows all again', () => {
    const data = new Float64Array(144);
    const ellipse = { x: 0, y: 0, xx: 50, xy: 30, yy: 50 };
    render(
      <HeatMap
        map={smallMap({ shape: [12, 12], data, sigma: undefined, masked: undefined, ellipse })}
        theme="bench"
      />,
    );
    const group = (): string =>
      document.querySelector('g[transform^="matrix"]')?.getAttribute('transform') ?? '';
    const whole = group();
    const stage = screen.getByRole('application');
    fireEvent.keyDown(stage, { key: '+' });
    expect(group()).not.toBe(whole);
    fireEvent.keyDown(stage, { key: '0' });
    expect(group()).toBe(whole);
    fireEvent.keyDown(stage, { key: '-' });
    expect(group()).toBe(whole);
    expect(document.querySelector('[data-ellipse]')).toBeTruthy();
    expect(screen.getByText('2 σ')).toBeTruthy();
  });

  it('marks values beyond a fixed range', () => {
    render(<HeatMap map={smallMap()} theme="bench" range={[0, 50]} />);
    expect(screen.getByText(/above the scale/)).toBeTruthy();
  });
});

describe('LinePlot', () => {
  it('draws points with error bars, model and residuals', () => {
    render(<LinePlot map={smallHistogram()} style="points" tone="pair" showModel showResiduals />);
    for (const part of ['errors', 'points', 'model', 'residuals']) {
      expect(document.querySelector(`[data-${part}]`)?.getAttribute('d')?.length).toBeGreaterThan(20);
    }
    expect(screen.getByText('delay (ps)')).toBeTruthy();
    fireEvent.keyDown(screen.getByRole('application'), { key: 'ArrowRight' });
    expect(readout()).toContain('delay 0 ps · 100(10) pairs · model 99 (+0.1 σ)');
  });

  it('moves the window by keys as three sliders', () => {
    const onChange = vi.fn();
    const brush = { lo: -300, hi: 300, centre: 0, onChange };
    render(<LinePlot map={smallHistogram()} style="steps" tone="pair" brush={brush} />);
    const [centre, start, end] = ['window, centre', 'window, start', 'window, end'].map((name) =>
      screen.getByRole('slider', { name }),
    );
    expect(start?.getAttribute('aria-valuetext')).toBe('\u2212300 ps');
    fireEvent.keyDown(start!, { key: 'ArrowRight' });
    expect(onChange).toHaveBeenLastCalledWith(-200, 300);
    fireEvent.keyDown(end!, { key: 'ArrowRight', shiftKey: true });
    expect(onChange).toHaveBeenLastCalledWith(-300, 1050);
    fireEvent.keyDown(centre!, { key: 'ArrowLeft' });
    expect(onChange).toHaveBeenLastCalledWith(-400, 200);
    fireEvent.keyDown(start!, { key: 'End' });
    expect(onChange).toHaveBeenLastCalledWith(200, 300);
    fireEvent.keyDown(centre!, { key: 'Home' });
    expect(onChange).toHaveBeenLastCalledWith(-1050, -450);
  });

  it('lets the window go when the pointer is taken away, and says it with the digits it shows', () => {
    const onChange = vi.fn();
    const brush = { lo: -300.123456, hi: 300, centre: 0, onChange };
    render(<LinePlot map={smallHistogram()} style="steps" tone="pair" brush={brush} />);
    const end = screen.getByRole('slider', { name: 'window, end' });
    end.setPointerCapture = vi.fn();
    fireEvent.pointerDown(end, { button: 0, clientX: 400 });
    fireEvent.pointerMove(end, { clientX: 420 });
    expect(onChange).toHaveBeenCalledOnce();
    fireEvent.pointerCancel(end);
    fireEvent.pointerMove(end, { clientX: 440 });
    expect(onChange).toHaveBeenCalledOnce();
    const start = screen.getByRole('slider', { name: 'window, start' });
    expect(start.getAttribute('aria-valuenow')).toBe('-300');
    expect(start.getAttribute('aria-valuetext')).toBe('\u2212300 ps');
  });

  it('gives every part of the window room to be grabbed, also at the edge of the plot', () => {
    const rect = { left: 60, top: 0, width: 400, height: 100 };
    for (const [x0, x1] of [
      [200, 300],
      [200, 203],
      [60, 460],
      [455, 460],
    ] as const) {
      const { lo, both, hi } = grabBoxes(x0, x1, rect);
      expect(Math.min(lo.width, both.width, hi.width)).toBeGreaterThanOrEqual(24);
      expect(lo.left + lo.width).toBeLessThanOrEqual(both.left);
      expect(both.left + both.width).toBeLessThanOrEqual(hi.left);
      expect(hi.left + hi.width).toBeLessThanOrEqual(474);
    }
    // A wide window: the edges themselves are grabbed.
    const wide = grabBoxes(200, 300, rect);
    expect(wide.lo.left).toBeLessThan(200);
    expect(wide.lo.left + wide.lo.width).toBeGreaterThan(200);
    expect(wide.hi.left).toBeLessThan(300);
  });

  it('names bands once and marks', () => {
    const band = { tone: 'accidental' as const, label: 'shifted windows' };
    const bands = [
      { ...band, lo: 400, hi: 500 },
      { ...band, lo: 600, hi: 700 },
    ];
    render(
      <LinePlot
        map={smallHistogram()}
        style="steps"
        tone="pair"
        logY
        bands={bands}
        marks={[{ at: 0, label: 'peak' }]}
      />,
    );
    expect(document.querySelectorAll('[data-band]')).toHaveLength(2);
    expect(screen.getAllByText('shifted windows')).toHaveLength(1);
    expect(screen.getByText('peak')).toBeTruthy();
  });
});

describe('BoundRuler', () => {
  it('says values, intervals, bounds and the verdict', () => {
    render(
      <BoundRuler
        entries={[
          { label: 'raw', value: 0.0291, sigma: 0.0009, interval: [0.0274, 0.0309], unit: 'hbar^2' },
          {
            label: 'accidentals subtracted',
            value: 0.0264,
            sigma: 0.0008,
            interval: [0.0249, 0.028],
            unit: 'hbar^2',
          },
        ]}
        bounds={[{ name: 'steering', value: 0.25, unit: 'hbar^2' }]}
        sentence="Below the steering bound by 74 standard deviations."
      />,
    );
    const name = screen.getByRole('img').getAttribute('aria-label') ?? '';
    expect(name).toContain('raw 0.0291(9) ħ², interval [0.0274, 0.0309]');
    expect(name).toContain('steering bound 0.25 ħ²');
    expect(screen.getByText(/74 standard deviations/)).toBeTruthy();
    // Shapes differ, not only colours.
    expect(document.querySelectorAll('[data-entry="raw"] circle')).toHaveLength(1);
    expect(document.querySelectorAll('[data-entry="accidentals subtracted"] circle')).toHaveLength(0);
  });
});

describe('RateStrip', () => {
  it('is a picture with a text alternative', () => {
    const series = [{ tone: 'signal' as const, label: 'signal', values: [1, 2, 3] }];
    render(<RateStrip label="Rates over 600 s" series={series} />);
    expect(screen.getByRole('img', { name: 'Rates over 600 s' })).toBeTruthy();
  });
});
