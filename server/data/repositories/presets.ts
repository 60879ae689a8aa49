import { randomUUID } from 'node:crypto';
import { and, count, desc, eq, type SQL } from 'drizzle-orm';
import type { Preset } from '../../../shared/contracts/preset';
import type { Database } from '../client';
import { user } from '../schema/auth-tables';
import { preset, presetVersion } from '../schema/bench-tables';

export interface PresetRecord {
  id: string;
  version: number;
  body: Preset;
  createdAt: Date;
  updatedAt: Date;
  byId: string;
  by: string;
}

export function createPresets(db: Database) {
  const columns = {
    id: preset.id,
    version: presetVersion.version,
    body: presetVersion.body,
    createdAt: preset.createdAt,
    updatedAt: presetVersion.createdAt,
    byId: presetVersion.madeBy,
    by: user.name,
  };
  const select = (where: SQL | undefined): Promise<PresetRecord[]> =>
    db
      .select(columns)
      .from(preset)
      .innerJoin(presetVersion, eq(presetVersion.presetId, preset.id))
      .innerJoin(user, eq(user.id, presetVersion.madeBy))
      .where(where)
      .orderBy(desc(presetVersion.createdAt), preset.id);
  const newest = eq(presetVersion.version, preset.latest);

  return {
    /** Newest version of each, newest first. */
    list: (groupId: string): Promise<PresetRecord[]> => select(and(eq(preset.groupId, groupId), newest)),

    /** One version, the newest when none is named. */
    async find(groupId: string, id: string, version: number | null): Promise<PresetRecord | null> {
      const which = version === null ? newest : eq(presetVersion.version, version);
      const rows = await select(and(eq(preset.groupId, groupId), eq(preset.id, id), which));
      return rows[0] ?? null;
    },

    async countIn(groupId: string): Promise<number> {
      const rows = await db.select({ n: count() }).from(preset).where(eq(preset.groupId, groupId));
      return rows[0]?.n ?? 0;
    },

    /** Stores version 1; answers the id. */
    async insert(groupId: string, madeBy: string, body: Preset): Promise<string> {
      const id = randomUUID();
      const now = new Date();
      await db.transaction(async (tx) => {
        await tx
          .insert(preset)
          .values({ id, groupId, study: body.study, latest: 1, createdAt: now, updatedAt: now });
        await tx.insert(presetVersion).values({ presetId: id, version: 1, body, madeBy, createdAt: now });
      });
      return id;
    },

    /** Stores the next version. The row of the preset is held meanwhile, so two writers get two numbers. */
    async append(id: string, madeBy: string, body: Preset): Promise<number> {
      return db.transaction(async (tx) => {
        const rows = await tx
          .select({ latest: preset.latest })
          .from(preset)
          .where(eq(preset.id, id))
          .for('update');
        const version = rows[0]!.latest + 1;
        const now = new Date();
        await tx.insert(presetVersion).values({ presetId: id, version, body, madeBy, createdAt: now });
        await tx.update(preset).set({ latest: version, updatedAt: now }).where(eq(preset.id, id));
        return version;
      });
    },
  };
}
export type Presets = ReturnType<typeof createPresets>;
