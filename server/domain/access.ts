import type { Me, Role } from '../../shared/contracts/http';
import { type Action, may } from '../../shared/contracts/permissions';
import type { People, PersonRecord } from '../data/repositories/people';
import { notFound, Refusal } from '../platform/refusal';
import { actionWords, parseRole } from './permissions';

/** A signed-in person inside one of their groups. */
export interface Member {
  userId: string;
  groupId: string;
  role: Role;
}

/** Ids of every table; anything else is answered as not found without asking the database. */
export function isId(text: string): boolean {
  return /^[A-Za-z0-9_-]{1,64}$/.test(text);
}

/** Refuses as "not found" outside the person's groups, so that nothing is told of other groups. */
export async function requireMember(people: People, groupId: string, userId: string): Promise<Member> {
  const stored = isId(groupId) ? await people.roleIn(groupId, userId) : null;
  const role = stored === null ? null : parseRole(stored);
  if (role === null) throw notFound('group');
  return { userId, groupId, role };
}

export function requireAction(member: Member, action: Action): void {
  if (may(member.role, action)) return;
  throw new Refusal(
    'not-allowed',
    `As ${member.role} of this group you may not ${actionWords[action]}; ask a lead of the group for another role.`,
  );
}

export async function describeMe(people: People, person: PersonRecord): Promise<Me> {
  const groups: Me['groups'] = [];
  for (const row of await people.memberships(person.id)) {
    const role = parseRole(row.role);
    if (role !== null) groups.push({ id: row.groupId, name: row.groupName, role });
  }
  return { user: { id: person.id, name: person.name, email: person.email }, groups };
}
