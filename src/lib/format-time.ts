const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
const two = (value: number): string => String(value).padStart(2, '0');

/** Day and time on this machine's clock, in the order that sorts: 2026-03-04 21:42. */
export function formatTime(iso: string): string {
  const at = new Date(iso);
  if (Number.isNaN(at.getTime())) return iso;
  return `${formatDay(at)} ${two(at.getHours())}:${two(at.getMinutes())}`;
}

function formatDay(at: Date): string {
  return `${at.getFullYear()}-${two(at.getMonth() + 1)}-${two(at.getDate())}`;
}

/** How long ago, for lists of what is new; older than a day, the date says more. */
export function formatAgo(iso: string, now: number): string {
  const at = new Date(iso);
  const past = now - at.getTime();
  if (Number.isNaN(past)) return iso;
  if (past < MINUTE) return 'just now';
  if (past < HOUR) return `${Math.floor(past / MINUTE)} min ago`;
  if (past < 24 * HOUR) return `${Math.floor(past / HOUR)} h ago`;
  return formatTime(iso);
}
