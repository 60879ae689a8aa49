import { type Role, roles } from '../../shared/contracts/http';

/** What can be done inside a group. The one table of who may; every route names its action. */
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

const allowed: Record<Role, readonly Action[]> = {
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

export function mayDo(role: Role, action: Action): boolean {
  return allowed[role].includes(action);
}

/** Stored roles are text; an unknown one gives no rights. The sign-in library may store several with commas. */
export function parseRole(stored: string): Role | null {
  const given = stored.split(',').map((part) => part.trim());
  return roles.find((role) => given.includes(role)) ?? null;
}

/** What a person is told who may not. */
export const actionWords: Record<Action, string> = {
  'presets.read': 'read presets',
  'presets.write': 'store presets',
  'sessions.use': 'keep sessions',
  'results.read': 'read results',
  'results.write': 'save results',
  'results.delete': 'delete results',
  'results.delete-any': 'delete results of others',
};
