import type { Role } from './http';

/** What can be done inside a group, and the one table of who may; the server refuses by it, the page may hide by it. */
export const actions = [
  'presets.read',
  'presets.write',
  'sessions.use',
  'results.read',
  'results.write',
  'results.delete',
  'results.delete-any',
] as const;
export type Action = (typeof actions)[number];

export const permissions: Readonly<Record<Role, readonly Action[]>> = {
  lead: actions,
  analyst: [
    'presets.read',
    'presets.write',
    'sessions.use',
    'results.read',
    'results.write',
    'results.delete',
  ],
  runner: ['presets.read', 'sessions.use', 'results.read', 'results.write'],
  guest: ['results.read'],
};

export function may(role: Role, action: Action): boolean {
  return permissions[role].includes(action);
}
