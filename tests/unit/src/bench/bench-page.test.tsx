// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from '@tanstack/react-query';
import { act, cleanup, fireEvent, render, screen, waitFor, within } from '@testing-library/react';
import { MemoryRouter } from 'react-router-dom';
import { afterEach, describe, expect, it, vi } from 'vitest';
import type { Role } from '../../../../shared/contracts/http';
import { TooltipProvider } from '../../../../src/components/ui/Tooltip';
import { BenchPage } from '../../../../src/features/bench/BenchPage';
import { type Bench, createBench } from '../../../../src/features/bench/components/bench-context';
import { sessionOfBench } from '../../../../src/features/bench/model/session-bench';
import { meQuery } from '../../../../src/lib/query/me';
import { samplesQuery } from '../../../../src/lib/query/samples';
import { handOverFiles, takeFiles } from '../../../../src/state/dropped-files';
import { stubServer } from '../app/server-stub';
import { stageOf } from '../viz/stage';
import {
  type FakeEngine,
  fakeEngine,
  fileOf,
  inspectionOf,
  outputOf,
  resultOf,
  tagsLayout,
} from './fake-engine';

stageOf(900, 600);

let bench: Bench | null = null;
afterEach(() => {
  bench?.runner.detach();
  cleanup();
});

async function openBench(engine: FakeEngine, role: Role = 'analyst'): Promise<Bench> {
  bench = createBench(engine);
  const queries = new QueryClient();
  queries.setQueryData(meQuery.queryKey, {
    user: { id: 'u', name: 'Someone', email: 's@demo.gemel' },
    groups: [{ id: 'g', name: 'Pair bench', role }],
  });
  queries.setQueryData(samplesQuery.queryKey, { scenario: '', files: [], presets: [] });
  render(
    <QueryClientProvider client={queries}>
      <MemoryRouter>
        <TooltipProvider>
          <BenchPage bench={bench} />
        </TooltipProvider>
      </MemoryRouter>
    </QueryClientProvider>,
  );
  await screen.findByRole('tab', { name: 'Delay' });
  return bench;
}

async function dropAndRun(engine: FakeEngine): Promise<void> {
  const drop = screen.getByTestId('bench-drop');
  const dataTransfer = { types: ['Files'], files: [fileOf('run.h5')] };
  fireEvent.dragEnter(drop, { dataTransfer });
  expect(screen.getByText(/Drop to put on the shelf/)).toBeTruthy();
  fireEvent.drop(drop, { dataTransfer });
  await waitFor(() => expect(engine.runs).toHaveLength(1));
  const run = engine.runs[0]!;
  await act(async () => run.answer({ status: 'ok', value: resultOf(outputOf(), run.request) }));
}

describe('the bench', () => {
  it('takes a dropped file to numbers with uncertainties, checks and a statement', async () => {
    const engine = fakeEngine();
    await openBench(engine);
    expect(screen.getByTestId('stage-needs').textContent).toContain(
      'an acquisition with time tags is needed',
    );
    await dropAndRun(engine);
    const rows = await screen.findAllByRole('row');
    const text = rows.map((row) => row.textContent);
    expect(text).toContainEqual(expect.stringMatching(/^Delay of the peak23702\.3\(16\)ps/));
    expect(text).toContainEqual(expect.stringMatching(/^Coincidences1\.235\(6\)1\.200\(7\)k\/s/));
    expect(screen.getAllByText('caution').length).toBeGreaterThan(0);
    expect(screen.getByText('Counted in a window.')).toBeTruthy();
    expect(screen.getByRole('slider', { name: 'window, end' })).toBeTruthy();
    // A reading nobody has looked over: said above the plots, and nothing of it can be saved.
    const guesses = screen.getByRole('list', { name: 'Readings to look over' });
    expect(guesses.textContent).toContain('Tick and detector map of run.h5 are only proposed');
    expect(screen.getByRole('button', { name: 'Save result' }).hasAttribute('disabled')).toBe(true);
    fireEvent.click(within(guesses).getByRole('button', { name: 'Open its reading' }));
    fireEvent.click(await screen.findByRole('button', { name: 'Apply' }));
    await waitFor(() =>
      expect(screen.getByRole('button', { name: 'Save result' }).hasAttribute('disabled')).toBe(false),
    );
    expect(screen.queryByRole('list', { name: 'Readings to look over' })).toBeNull();
  });

  it('moves the window by keys on the histogram, and takes it back with Ctrl+Z', async () => {
    const engine = fakeEngine();
    const { store } = await openBench(engine);
    await dropAndRun(engine);
    fireEvent.keyDown(await screen.findByRole('slider', { name: 'window, end' }), { key: 'ArrowRight' });
    expect(store.getState().dials.delay?.present).toEqual({ delay: 50, window: 1100 });
    await waitFor(() => expect(engine.runs).toHaveLength(2));
    fireEvent.keyDown(window, { key: 'z', ctrlKey: true });
    expect(store.getState().dials.delay?.present).toEqual({});
    const field = screen.getByLabelText('Coincidence window');
    field.focus();
    fireEvent.keyDown(field, { key: 'z', ctrlKey: true, shiftKey: true });
    expect(store.getState().dials.delay?.present).toEqual({});
  });

  it('says what a bad file is and leaves the way out', async () => {
    const engine = fakeEngine();
    engine.inspection = () => ({
      status: 'error',
      problem: { code: 'truncated', message: 'It was cut short; copy it again.', place: 'run.h5, byte 80' },
    });
    await openBench(engine);
    fireEvent.drop(screen.getByTestId('bench-drop'), {
      dataTransfer: { types: ['Files'], files: [fileOf('run.h5')] },
    });
    const alert = await screen.findByRole('alert');
    expect(alert.textContent).toContain('It was cut short; copy it again.');
    expect(alert.textContent).toContain('run.h5, byte 80');
    expect(within(alert).getByRole('button', { name: 'Look again' })).toBeTruthy();
  });

  it('leaves a runner the inputs and takes away the dials', async () => {
    const engine = fakeEngine();
    await openBench(engine, 'runner');
    await dropAndRun(engine);
    expect(screen.getByText(/the dials stand/)).toBeTruthy();
    expect(screen.getByLabelText('Coincidence window').hasAttribute('disabled')).toBe(true);
    expect(screen.queryByRole('button', { name: 'Undo' })).toBeNull();
    expect(screen.queryByRole('slider', { name: 'window, end' })).toBeNull();
    expect(screen.queryByRole('button', { name: /Edit the reading/ })).toBeNull();
  });

  it('looks at the bytes again with the corrected layout, and runs with it once applied', async () => {
    const engine = fakeEngine();
    engine.inspection = (name, layout) => ({
      status: 'ok',
      value: inspectionOf(name, {
        layout: layout ?? tagsLayout,
        because: layout ? 'As given.' : 'Proposed.',
      }),
    });
    await openBench(engine);
    await dropAndRun(engine);
    fireEvent.click(screen.getByRole('button', { name: 'Edit the reading of run.h5' }));
    const dialog = await screen.findByRole('dialog', { name: 'Reading of run.h5' });
    expect(within(dialog).getByText('Proposed.')).toBeTruthy();
    const tick = within(dialog).getByLabelText('Tick length');
    fireEvent.change(tick, { target: { value: '81' } });
    fireEvent.blur(tick);
    expect(await within(dialog).findByText('As given.', undefined, { timeout: 3000 })).toBeTruthy();
    fireEvent.click(within(dialog).getByRole('button', { name: 'Apply' }));
    await waitFor(() => expect(engine.runs).toHaveLength(2));
    expect(engine.runs[1]?.request.inputs.tags?.layout).toEqual({ ...tagsLayout, tickFs: 81_000 });
  });

  it('offers to start the engine again when it stopped', async () => {
    const engine = fakeEngine();
    const restart = vi.spyOn(engine, 'restart');
    await openBench(engine);
    fireEvent.drop(screen.getByTestId('bench-drop'), {
      dataTransfer: { types: ['Files'], files: [fileOf('run.h5')] },
    });
    await waitFor(() => expect(engine.runs).toHaveLength(1));
    const problem = { code: 'internal' as const, message: 'The engine stopped.', place: null };
    await act(async () => engine.runs[0]!.answer({ status: 'error', problem }));
    fireEvent.click(await screen.findByRole('button', { name: 'Start the engine again' }));
    expect(restart).toHaveBeenCalledOnce();
    await waitFor(() => expect(engine.runs).toHaveLength(2));
  });

  it('takes files dropped on another page', async () => {
    const engine = fakeEngine();
    handOverFiles([fileOf('from-home.h5')]);
    await openBench(engine);
    expect(await screen.findByRole('listitem', { name: 'from-home.h5' })).toBeTruthy();
    expect(takeFiles()).toEqual([]);
  });

  it('saves an opened session over, and asks for a name only for a new one', async () => {
    const engine = fakeEngine();
    const { store } = await openBench(engine);
    const state = sessionOfBench(store.getState(), 'Monday');
    act(() => store.getState().openSession({ id: 's1', name: 'Monday' }, { ...state, resultId: 'r1' }));
    const link = screen.getByRole('link', { name: 'Result saved from this session' });
    expect(link.getAttribute('href')).toBe('/results/r1');
    const asked = stubServer({
      'PUT /api/groups/g/sessions/s1': ({ body }) => ({
        body: { id: 's1', createdAt: '', updatedAt: '', by: 'Someone', ...(body as object) },
      }),
    });
    const menu = screen.getByRole('button', { name: 'Save …' });
    fireEvent.keyDown(menu, { key: 'Enter' });
    expect(await screen.findByRole('menuitem', { name: 'Save session as …' })).toBeTruthy();
    fireEvent.click(screen.getByRole('menuitem', { name: 'Save session' }));
    await screen.findByRole('link', { name: 'Monday' });
    expect(asked.map(({ method }) => method)).toEqual(['PUT']);
    expect(screen.queryByRole('dialog')).toBeNull();
  });
});
