import { type SessionRow, sessionWriteSchema } from '../../shared/contracts/http';
import type { SessionRecord, SessionSummaryRecord, Sessions } from '../data/repositories/sessions';
import { notFound } from '../platform/refusal';
import { isId, type Member } from './access';
import { cleanName, parseBody } from './parse-body';

type SessionSummary = Omit<SessionRow, 'state'> & { study: string };

function toSummary(record: SessionSummaryRecord): SessionSummary {
  return {
    id: record.id,
    createdAt: record.createdAt.toISOString(),
    updatedAt: record.updatedAt.toISOString(),
    by: record.by,
    byId: record.byId,
    name: record.name,
    study: record.study,
  };
}

function toRow(record: SessionRecord): SessionRow {
  const { study: _study, ...stamp } = toSummary(record);
  return { ...stamp, state: record.state };
}

export async function listSessions(sessions: Sessions, member: Member): Promise<SessionSummary[]> {
  return (await sessions.list(member.groupId, member.userId)).map(toSummary);
}

export async function getSession(sessions: Sessions, member: Member, id: string): Promise<SessionRow> {
  const record = isId(id) ? await sessions.find(member.groupId, member.userId, id) : null;
  if (record === null) throw notFound('session');
  return toRow(record);
}

export async function createSession(sessions: Sessions, member: Member, body: unknown): Promise<SessionRow> {
  const { name, state } = parseSession(body);
  const id = await sessions.insert(member.groupId, member.userId, name, state);
  return getSession(sessions, member, id);
}

export async function changeSession(
  sessions: Sessions,
  member: Member,
  id: string,
  body: unknown,
): Promise<SessionRow> {
  const { name, state } = parseSession(body);
  const changed = isId(id) && (await sessions.update(member.groupId, member.userId, id, name, state));
  if (!changed) throw notFound('session');
  return getSession(sessions, member, id);
}

function parseSession(body: unknown) {
  const { name, state } = parseBody(sessionWriteSchema, body);
  return {
    name: cleanName(name, 'name'),
    state: { ...state, study: cleanName(state.study, 'state.study') },
  };
}
