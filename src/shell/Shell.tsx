import { Suspense, useEffect, useRef } from 'react';
import { Outlet, ScrollRestoration, useLocation, useNavigation } from 'react-router-dom';
import { mayUseBench, useGroup } from '../lib/query/me';
import { type RouteTraits, useRouteTraits } from './route-traits';
import { TopBar } from './TopBar';

/** Moves the keyboard to the new page, as a full page load would, but not at the first one. */
function useFocusOnArrival(pathname: string) {
  const ref = useRef<HTMLElement>(null);
  const last = useRef(pathname);
  useEffect(() => {
    if (last.current === pathname) return;
    last.current = pathname;
    ref.current?.focus({ preventScroll: true });
  }, [pathname]);
  return ref;
}

/** The bar and the page below it. */
export function Shell() {
  const traits = useRouteTraits();
  const { pathname } = useLocation();
  const busy = useNavigation().state !== 'idle';
  const mainRef = useFocusOnArrival(pathname);
  const height = traits.fills ? 'h-dvh overflow-hidden' : 'min-h-dvh';
  return (
    <div className={`flex flex-col ${height}`}>
      <a
        href="#main"
        className="fixed top-1 left-1 z-50 -translate-y-12 border border-strong bg-raised px-3 py-1.5 text-sm focus:translate-y-0"
      >
        Skip to the page
      </a>
      <TopBar busy={busy} />
      <main
        id="main"
        ref={mainRef}
        tabIndex={-1}
        aria-label={traits.title}
        className={`min-w-0 flex-1 outline-none ${traits.fills ? 'min-h-0' : ''}`}
      >
        <Suspense fallback={<p className="px-5 py-4 font-mono text-xs text-dim">opening …</p>}>
          <Inside traits={traits} />
        </Suspense>
      </main>
      {traits.fills ? null : <ScrollRestoration />}
    </div>
  );
}

function Inside({ traits }: { traits: RouteTraits }) {
  const group = useGroup();
  const needs = traits.needs ?? 'group';
  if (needs !== 'nothing' && group === null) {
    return (
      <Notice>
        You are not in a group yet. A lead of a group can add you; then its presets and results are here.
      </Notice>
    );
  }
  if (needs === 'data' && group !== null && !mayUseBench(group)) {
    return (
      <Notice>
        You read {group.name} as a guest: its results are open to you, the bench and the presets are for those
        who work with its data. A lead can change that.
      </Notice>
    );
  }
  // A change of group is a change of everything on the page.
  return <Outlet key={group?.id} />;
}

function Notice({ children }: { children: React.ReactNode }) {
  return <p className="max-w-prose px-5 py-6 text-base text-dim">{children}</p>;
}
