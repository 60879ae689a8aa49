/** Address of the sign-in page that leads back afterwards. */
export function signInPath(back: string): string {
  return back === '/' ? '/sign-in' : `/sign-in?back=${encodeURIComponent(back)}`;
}

/** Where to go after signing in: a path of this page, never another site. */
export function readBack(search: URLSearchParams): string {
  const back = search.get('back') ?? '/';
  return /^\/(?![/\\])/.test(back) && !back.startsWith('/sign-in') ? back : '/';
}
