// @vitest-environment jsdom
import { QueryClientProvider } from '@tanstack/react-query';
import { configure, fireEvent, render, screen, waitFor, within } from '@testing-library/react';
import { createMemoryRouter, RouterProvider } from 'react-router-dom';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { routes } from '../../../../src/app/routes';
import { TooltipProvider } from '../../../../src/components/ui/Tooltip';
import { queryClient } from '../../../../src/lib/query/query-client';
import { stageOf } from '../viz/stage';
import { inlineMap, mapPath, meOf, presetRow, resultRow, samples, summary } from './fixtures';
import { type Answer, refusal, stubServer } from './server-stub';

stageOf(600, 300);
// Pages are loaded when they are first opened, which takes a busy machine its time.
configure({ asyncUtilTimeout: 15_000 });
const signedOut = (): Answer => refusal(401, 'not-signed-in', 'You are not signed in.');
const demo = { email: 'lead@demo.gemel', password: 'pair-of-lanterns' };

function signedIn(role: 'lead' | 'analyst' | 'guest' = 'lead') {
  return {
    'GET /api/me': () => ({ body: meOf(role) }),
    'GET /api/samples': () => ({ body: samples }),
    'GET /api/groups/g1/results': () => ({ body: { results: [summary({})] } }),
    'GET /api/groups/g1/results/r1': () => ({ body: resultRow }),
    [`GET ${mapPath}`]: () => ({ body: inlineMap }),
    'GET /api/groups/g1/presets': () => ({ body: { presets: [presetRow] } }),
    'GET /api/groups/g1/sessions': () => ({ body: { sessions: [] } }),
  };
}

function open(path: string) {
  const router = createMemoryRouter(routes, { initialEntries: [path] });
  render(
    <QueryClientProvider client={queryClient}>
      <TooltipProvider>
        <RouterProvider router={router} />
      </TooltipProvider>
    </QueryClientProvider>,
  );
  return router;
}

beforeEach(() => {
  queryClient.clear();
  vi.stubGlobal('scrollTo', () => undefined);
});
afterEach(() => vi.unstubAllGlobals());

describe('signing in', () => {
  it('leads to the sign-in, says what is wrong, and comes back to the page asked for', async () => {
    let known = false;
    const asked = stubServer({
      ...signedIn(),
      'GET /api/me': () => (known ? { body: meOf('lead') } : signedOut()),
      'GET /api/server': () => ({ body: { version: '1', demo } }),
      'POST /api/auth/sign-in/email': ({ body }) => {
        known = JSON.stringify(body) === JSON.stringify(demo);
        return known ? { body: {} } : refusal(401, 'wrong-sign-in', 'These do not belong together.');
      },
    });
    const router = open('/results?words=night');
    fireEvent.change(await screen.findByLabelText('E-mail'), { target: { value: 'nobody' } });
    fireEvent.click(screen.getByRole('button', { name: 'Sign in' }));
    await screen.findByText(/has an @ in it/);
    expect(asked.some(({ method }) => method === 'POST')).toBe(false);

    fireEvent.change(screen.getByLabelText('E-mail'), { target: { value: 'a@b.example' } });
    fireEvent.change(screen.getByLabelText('Password'), { target: { value: 'wrong' } });
    fireEvent.click(screen.getByRole('button', { name: 'Sign in' }));
    await screen.findByText('These do not belong together.');

    fireEvent.click(await screen.findByRole('button', { name: 'Use the demo sign-in' }));
    await screen.findByRole('table', { name: 'Results of the group' });
    expect(router.state.location.pathname + router.state.location.search).toBe('/results?words=night');
  });
});

describe('home', () => {
  it('opens the witness from tags first and offers the other samples by their place', async () => {
    stubServer(signedIn());
    open('/');
    const first = await screen.findByRole('link', { name: 'Open the samples' });
    expect(first.getAttribute('href')).toBe('/bench?sample=2');
    const others = within(screen.getByRole('list', { name: 'Other samples' })).getAllByRole('link');
    expect(others.map((link) => link.getAttribute('href'))).toEqual(['/bench?sample=1', '/bench?sample=0']);
    expect(screen.getByText('1.234(3) k/s')).toBeTruthy();
    expect(screen.getByText('Coincidences, accidentals subtracted')).toBeTruthy();
  });

  it('says what failed in its place and leaves the rest standing', async () => {
    stubServer({
      ...signedIn(),
      'GET /api/groups/g1/sessions': () => refusal(500, 'internal', 'The lamp is out.'),
    });
    open('/');
    await screen.findByText('The lamp is out.');
    expect(await screen.findByRole('link', { name: 'Night run' })).toBeTruthy();
  });

  it('shows a guest results only, and keeps them from the bench with a sentence', async () => {
    stubServer(signedIn('guest'));
    const router = open('/');
    await screen.findByRole('link', { name: 'Night run' });
    expect(screen.queryByRole('link', { name: 'Bench' })).toBeNull();
    expect(screen.queryByRole('link', { name: 'Open the samples' })).toBeNull();
    await router.navigate('/presets');
    await screen.findByText(/as a guest/);
  });
});

describe('result', () => {
  it('draws the fetched maps, leads to its preset and is deleted after a question', async () => {
    const asked = stubServer({
      ...signedIn('analyst'),
      'DELETE /api/groups/g1/results/r1': () => ({ status: 204 }),
    });
    const router = open('/results/r1');
    await screen.findByRole('heading', { level: 1, name: 'Night run' });
    await screen.findByText('Delay histogram');
    expect(screen.getByText('31.2(4)')).toBeTruthy();
    const bench = await screen.findByRole('link', { name: 'Open on the bench with this preset' });
    expect(bench.getAttribute('href')).toBe('/bench?result=r1');

    fireEvent.click(screen.getByRole('button', { name: 'Delete' }));
    expect(asked.some(({ method }) => method === 'DELETE')).toBe(false);
    fireEvent.click(await screen.findByRole('button', { name: 'Delete for everyone' }));
    await waitFor(() => expect(router.state.location.pathname).toBe('/results'));
    expect(asked.some(({ method }) => method === 'DELETE')).toBe(true);
  });

  it('does not offer to delete what another analyst made', async () => {
    stubServer({
      ...signedIn('analyst'),
      'GET /api/groups/g1/results/r1': () => ({ body: { ...resultRow, byId: 'u2' } }),
    });
    open('/results/r1');
    await screen.findByText('Delay histogram');
    expect(screen.queryByRole('button', { name: 'Delete' })).toBeNull();
  });

  it('says what is missing and the way on', async () => {
    stubServer({
      ...signedIn(),
      'GET /api/groups/g1/results/r9': () => refusal(404, 'not-found', 'There is no such result.'),
    });
    open('/results/r9');
    await screen.findByText('There is no such result.');
    expect(screen.getByRole('link', { name: 'All results' })).toBeTruthy();
  });
});

describe('the shell', () => {
  it('says when the server cannot tell who is there', async () => {
    stubServer({ 'GET /api/me': () => refusal(503, 'not-ready', 'The database does not answer.') });
    open('/');
    await screen.findByText('The database does not answer.');
    expect(screen.getByRole('button', { name: 'Reload the page' })).toBeTruthy();
  });

  it('has a page for addresses that lead nowhere', async () => {
    stubServer(signedIn());
    open('/nowhere');
    await screen.findByRole('heading', { name: 'There is no such page' });
  });

  it('turns the theme round and remembers it', async () => {
    stubServer(signedIn());
    open('/');
    fireEvent.click(await screen.findByRole('button', { name: /^Projector theme/ }));
    expect(document.documentElement.dataset.theme).toBe('projector');
    expect(localStorage.getItem('gemel.theme')).toBe('projector');
    fireEvent.click(screen.getByRole('button', { name: /^Bench theme/ }));
    expect(document.documentElement.dataset.theme).toBe('bench');
  });
});
