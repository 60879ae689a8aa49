import { randomUUID } from 'node:crypto';
import { and, desc, eq, inArray } from 'drizzle-orm';
import type { ResultSummary } from '../../../shared/contracts/http';
import type { ResultFile } from '../../../shared/contracts/result';
import type { Database } from '../client';
import { user } from '../schema/auth-tables';
import { result, resultMap } from '../schema/bench-tables';

export interface ResultSummaryRecord {
  id: string;
  name: string;
  study: string;
  headline: ResultSummary['headline'];
  createdAt: Date;
  byId: string;
  by: string;
}
export interface ResultRecord extends ResultSummaryRecord {
  body: ResultFile;
  maps: StoredMap[];
}
export interface StoredMap {
  name: string;
  hash: string;
  bytes: number;
}
export interface NewResult {
  groupId: string;
  madeBy: string;
  name: string;
  study: string;
  headline: ResultSummary['headline'];
  body: ResultFile;
  maps: StoredMap[];
}

/** Map rows per statement: four parameters each, far below the 65535 a statement may bind. */
const mapRowsPerInsert = 1000;

export function createResults(db: Database) {
  const summary = {
    id: result.id,
    name: result.name,
    study: result.study,
    headline: result.headline,
    createdAt: result.createdAt,
    byId: result.madeBy,
    by: user.name,
  };

  return {
    /** Newest first. */
    list: (groupId: string): Promise<ResultSummaryRecord[]> =>
      db
        .select(summary)
        .from(result)
        .innerJoin(user, eq(user.id, result.madeBy))
        .where(eq(result.groupId, groupId))
        .orderBy(desc(result.createdAt), result.id),

    async find(groupId: string, id: string): Promise<ResultRecord | null> {
      const rows = await db
        .select({ ...summary, body: result.body })
        .from(result)
        .innerJoin(user, eq(user.id, result.madeBy))
        .where(and(eq(result.groupId, groupId), eq(result.id, id)));
      const row = rows[0];
      if (row === undefined) return null;
      const maps = await db
        .select({ name: resultMap.name, hash: resultMap.hash, bytes: resultMap.bytes })
        .from(resultMap)
        .where(eq(resultMap.resultId, id));
      return { ...row, maps };
    },

    /** True when some result of the group has this map. */
    async hasMap(groupId: string, hash: string): Promise<boolean> {
      const rows = await db
        .select({ hash: resultMap.hash })
        .from(resultMap)
        .innerJoin(result, eq(result.id, resultMap.resultId))
        .where(and(eq(result.groupId, groupId), eq(resultMap.hash, hash)))
        .limit(1);
      return rows.length === 1;
    },

    /** The maps are in the store already. */
    async insert(entry: NewResult): Promise<string> {
      const id = randomUUID();
      const { maps, ...row } = entry;
      await db.transaction(async (tx) => {
        await tx.insert(result).values({ id, ...row });
        for (let start = 0; start < maps.length; start += mapRowsPerInsert) {
          const part = maps.slice(start, start + mapRowsPerInsert);
          await tx.insert(resultMap).values(part.map((map) => ({ resultId: id, ...map })));
        }
      });
      return id;
    },

    /** Removes the result; answers the hashes of its maps that no other result names. */
    async remove(groupId: string, id: string): Promise<string[]> {
      return db.transaction(async (tx) => {
        const mine = await tx
          .selectDistinct({ hash: resultMap.hash })
          .from(resultMap)
          .innerJoin(result, eq(result.id, resultMap.resultId))
          .where(and(eq(result.groupId, groupId), eq(result.id, id)));
        await tx.delete(result).where(and(eq(result.groupId, groupId), eq(result.id, id)));
        const hashes = mine.map((row) => row.hash);
        if (hashes.length === 0) return [];
        const kept = await tx
          .selectDistinct({ hash: resultMap.hash })
          .from(resultMap)
          .where(inArray(resultMap.hash, hashes));
        const still = new Set(kept.map((row) => row.hash));
        return hashes.filter((hash) => !still.has(hash));
      });
    },
  };
}
export type Results = ReturnType<typeof createResults>;
