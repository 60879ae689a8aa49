import { Link, NavLink } from 'react-router-dom';
import { ThemeToggle } from '../components/page/ThemeToggle';
import { Mark } from '../components/ui/Mark';
import { mayUseBench, useGroup } from '../lib/query/me';
import { PersonMenu } from './PersonMenu';

const LINKS = [
  { to: '/', label: 'Home', data: false },
  { to: '/bench', label: 'Bench', data: true },
  { to: '/results', label: 'Results', data: false },
  { to: '/presets', label: 'Presets', data: true },
] as const;

function linkClass({ isActive }: { isActive: boolean }): string {
  const state = isActive ? 'border-text text-text' : 'border-transparent text-dim hover:text-text';
  return `flex h-full items-center border-b-2 px-0.5 pt-0.5 text-sm ${state}`;
}

/** One slim line: where one is, where one can go, who one is. */
export function TopBar({ busy }: { busy: boolean }) {
  const group = useGroup();
  const links = LINKS.filter((link) => !link.data || (group !== null && mayUseBench(group)));
  return (
    <header className="sticky top-0 z-30 flex h-11 shrink-0 items-stretch gap-6 border-b border-line bg-bg px-4 max-sm:gap-3">
      <Link to="/" className="flex items-center gap-2.5" aria-label="Gemel, home">
        <Mark size={22} />
        <span className="font-mono text-sm font-semibold max-sm:hidden">Gemel</span>
      </Link>
      <span className="flex min-w-0 items-center font-mono text-xs text-dim max-md:hidden">
        <span className="truncate">{group?.name ?? 'no group'}</span>
      </span>
      <nav aria-label="Pages" className="flex min-w-0 items-stretch gap-5 overflow-x-auto max-sm:gap-3">
        {links.map((link) => (
          <NavLink key={link.to} to={link.to} end={link.to === '/'} className={linkClass}>
            {link.label}
          </NavLink>
        ))}
      </nav>
      <span role="status" className="flex flex-1 items-center font-mono text-xs text-dim max-sm:hidden">
        {busy ? 'opening …' : ''}
      </span>
      <span className="flex items-center gap-2">
        <ThemeToggle />
        <PersonMenu />
      </span>
    </header>
  );
}
