import type { Request, Response } from 'express';
import type { Action } from '../../shared/contracts/permissions';
import type { Member } from '../domain/access';
import type { RouteDeps } from './route-deps';

/** A route inside a group. Who is asking and whether they may is settled before its body is read. */
export interface GroupRoute {
  method: 'get' | 'post' | 'put' | 'delete';
  /** Below /api/groups/:groupId. */
  path: string;
  action: Action;
  /** Largest body; routes without one read none. */
  bodyLimit?: string;
  handle(deps: RouteDeps, member: Member, request: Request, response: Response): Promise<void>;
}

export const smallBody = '1mb';
export const resultBody = '64mb';

/** A parameter of the path, which express types as text or list. */
export function param(request: Request, name: string): string {
  return String(request.params[name] ?? '');
}
