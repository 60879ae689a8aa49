import { useMatches } from 'react-router-dom';

/** What the shell wants to know of the page inside it. */
export interface RouteTraits {
  title: string;
  /** The page takes the whole height and scrolls by itself, as the bench does. */
  fills?: boolean;
  /** group (when left out): a group; data: a role that works with data; nothing: only a person. */
  needs?: 'nothing' | 'group' | 'data';
}

function isTraits(value: unknown): value is RouteTraits {
  return typeof value === 'object' && value !== null && 'title' in value;
}

export function useRouteTraits(): RouteTraits {
  const handle = useMatches().at(-1)?.handle;
  return isTraits(handle) ? handle : { title: 'Gemel' };
}
