import { createBrowserRouter, type LoaderFunctionArgs, type RouteObject, redirect } from 'react-router-dom';
import { NotFound } from '../components/page/NotFound';
import { RootProblem } from '../components/page/RootProblem';
import { RouteProblem } from '../components/page/RouteProblem';
import { isSignedOut } from '../lib/errors/request-problem';
import { meQuery } from '../lib/query/me';
import { queryClient } from '../lib/query/query-client';
import { signInPath } from '../lib/query/sign-in-path';
import { useEngineSettings } from '../lib/workers/engine-settings';
import { Opening } from '../shell/Opening';
import type { RouteTraits } from '../shell/route-traits';
import { Shell } from '../shell/Shell';

/** Signed-in pages start knowing who is there; others are sent to the sign-in and come back. */
export async function loadMe({ request }: LoaderFunctionArgs): Promise<null> {
  try {
    const { user } = await queryClient.ensureQueryData(meQuery);
    useEngineSettings.getState().openFor(user.id);
    return null;
  } catch (error) {
    if (!isSignedOut(error)) throw error;
    const { pathname, search } = new URL(request.url);
    throw redirect(signInPath(pathname + search));
  }
}

const bench: RouteTraits = { title: 'Bench', fills: true, needs: 'data' };
const presets: RouteTraits = { title: 'Presets', needs: 'data' };

const pages: RouteObject[] = [
  {
    index: true,
    handle: { title: 'Home' } satisfies RouteTraits,
    lazy: async () => ({ Component: (await import('../features/home/HomePage')).HomePage }),
  },
  {
    path: 'bench',
    handle: bench,
    lazy: async () => ({ Component: (await import('../features/bench/BenchPage')).BenchPage }),
  },
  {
    path: 'results',
    handle: { title: 'Results' } satisfies RouteTraits,
    lazy: async () => ({ Component: (await import('../features/results/ResultsPage')).ResultsPage }),
  },
  {
    path: 'results/:id',
    handle: { title: 'Result' } satisfies RouteTraits,
    lazy: async () => ({ Component: (await import('../features/results/ResultPage')).ResultPage }),
  },
  {
    path: 'presets',
    handle: presets,
    lazy: async () => ({ Component: (await import('../features/presets/PresetsPage')).PresetsPage }),
  },
  {
    path: 'presets/:id',
    handle: { ...presets, title: 'Preset' },
    lazy: async () => ({ Component: (await import('../features/presets/PresetPage')).PresetPage }),
  },
  {
    path: 'account',
    handle: { title: 'Account', needs: 'nothing' } satisfies RouteTraits,
    lazy: async () => ({ Component: (await import('../features/account/AccountPage')).AccountPage }),
  },
  { path: '*', handle: { title: 'Not found', needs: 'nothing' } satisfies RouteTraits, Component: NotFound },
];

export const routes: RouteObject[] = [
  {
    path: '/sign-in',
    handle: { title: 'Sign in' } satisfies RouteTraits,
    HydrateFallback: Opening,
    ErrorBoundary: RootProblem,
    lazy: async () => ({ Component: (await import('../features/sign-in/SignInPage')).SignInPage }),
  },
  {
    path: '/',
    loader: loadMe,
    // Who is there does not change with every click.
    shouldRevalidate: () => false,
    Component: Shell,
    HydrateFallback: Opening,
    ErrorBoundary: RootProblem,
    children: pages.map((page) => ({ ...page, ErrorBoundary: RouteProblem }) as RouteObject),
  },
];

export function createRouter() {
  return createBrowserRouter(routes);
}
