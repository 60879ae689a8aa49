import { readdirSync, readFileSync } from 'node:fs';

/** A process as Linux tells of it. */
interface Running {
  pid: number;
  parent: number;
  command: string;
  residentMB: number;
  /** Processor time so far, in hundredths of a second. */
  cpuTicks: number;
}

const PAGE_MB = 4096 / 2 ** 20;

/** All descendants of a process; empty where there is no /proc. */
export function descendantsOf(root: number): Running[] {
  if (process.platform !== 'linux') return [];
  const all = readdirSync('/proc')
    .map(Number)
    .flatMap((pid) => (Number.isInteger(pid) ? (readProcess(pid) ?? []) : []));
  const found: Running[] = [];
  for (let parents = [root]; parents.length > 0; ) {
    const next = all.filter(({ parent }) => parents.includes(parent));
    found.push(...next);
    parents = next.map(({ pid }) => pid);
  }
  return found;
}

function readProcess(pid: number): Running | null {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8');
    // The name stands in parentheses and may hold spaces.
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ');
    return {
      pid,
      parent: Number(fields[1]),
      command: readFileSync(`/proc/${pid}/cmdline`, 'utf8').replaceAll('\0', ' '),
      residentMB: Number(fields[21]) * PAGE_MB,
      cpuTicks: Number(fields[11]) + Number(fields[12]),
    };
  } catch (thrown) {
    // It ended between the listing and the reading.
    if (thrown instanceof Error && 'code' in thrown && ['ENOENT', 'ESRCH'].includes(String(thrown.code)))
      return null;
    throw thrown;
  }
}

const EVERY_MS = 50;

/** Follows the memory of chosen descendants until `stop`, which tells the largest sum; null where it cannot be known. */
export function watchMemory(root: number, chooses: (command: string) => boolean): { stop(): number | null } {
  let peak = 0;
  const look = (): void => {
    const now = descendantsOf(root).filter(({ command }) => chooses(command));
    peak = Math.max(
      peak,
      now.reduce((sum, { residentMB }) => sum + residentMB, 0),
    );
  };
  look();
  const timer = setInterval(look, EVERY_MS);
  return {
    stop() {
      clearInterval(timer);
      look();
      return peak > 0 ? peak : null;
    },
  };
}
