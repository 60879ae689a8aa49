import { randomUUID } from 'node:crypto';
import { and, desc, eq } from 'drizzle-orm';
import type { BenchState } from '../../../shared/contracts/http';
import type { Database } from '../client';
import { user } from '../schema/auth-tables';
import { benchSession } from '../schema/bench-tables';

export interface SessionSummaryRecord {
  id: string;
  name: string;
  study: string;
  createdAt: Date;
  updatedAt: Date;
  byId: string;
  by: string;
}
export interface SessionRecord extends SessionSummaryRecord {
  state: BenchState;
}

/** Every call names the maker: a session is seen and changed by nobody else. */
export function createSessions(db: Database) {
  const summary = {
    id: benchSession.id,
    name: benchSession.name,
    study: benchSession.study,
    createdAt: benchSession.createdAt,
    updatedAt: benchSession.updatedAt,
    byId: benchSession.madeBy,
    by: user.name,
  };
  const of = (groupId: string, madeBy: string) =>
    and(eq(benchSession.groupId, groupId), eq(benchSession.madeBy, madeBy));

  return {
    /** Last changed first. */
    list: (groupId: string, madeBy: string): Promise<SessionSummaryRecord[]> =>
      db
        .select(summary)
        .from(benchSession)
        .innerJoin(user, eq(user.id, benchSession.madeBy))
        .where(of(groupId, madeBy))
        .orderBy(desc(benchSession.updatedAt), benchSession.id),

    async find(groupId: string, madeBy: string, id: string): Promise<SessionRecord | null> {
      const rows = await db
        .select({ ...summary, state: benchSession.state })
        .from(benchSession)
        .innerJoin(user, eq(user.id, benchSession.madeBy))
        .where(and(of(groupId, madeBy), eq(benchSession.id, id)));
      return rows[0] ?? null;
    },

    async insert(groupId: string, madeBy: string, name: string, state: BenchState): Promise<string> {
      const id = randomUUID();
      const now = new Date();
      await db.insert(benchSession).values({
        id,
        groupId,
        madeBy,
        name,
        study: state.study,
        state,
        createdAt: now,
        updatedAt: now,
      });
      return id;
    },

    /** False when there is no such session of this maker. */
    async update(
      groupId: string,
      madeBy: string,
      id: string,
      name: string,
      state: BenchState,
    ): Promise<boolean> {
      const rows = await db
        .update(benchSession)
        .set({ name, study: state.study, state, updatedAt: new Date() })
        .where(and(of(groupId, madeBy), eq(benchSession.id, id)))
        .returning({ id: benchSession.id });
      return rows.length === 1;
    },
  };
}
export type Sessions = ReturnType<typeof createSessions>;
