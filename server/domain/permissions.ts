import { type Role, roles } from '../../shared/contracts/http';
import type { Action } from '../../shared/contracts/permissions';

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
