import { randomUUID } from 'node:crypto';
import { and, eq, inArray, notInArray, sql } from 'drizzle-orm';
import type { Database } from '../client';
import { account, member, organization, session, user } from '../schema/auth-tables';

export interface PersonRecord {
  id: string;
  name: string;
  email: string;
}

export interface MembershipRecord {
  groupId: string;
  groupName: string;
  role: string;
}

/** People, groups and who belongs where. Signing in itself is the sign-in library's. */
export function createPeople(db: Database) {
  return {
    async ping(): Promise<void> {
      await db.execute(sql`select 1`);
    },

    /** Groups of a person, by name. */
    memberships: (userId: string): Promise<MembershipRecord[]> =>
      db
        .select({ groupId: organization.id, groupName: organization.name, role: member.role })
        .from(member)
        .innerJoin(organization, eq(organization.id, member.organizationId))
        .where(eq(member.userId, userId))
        .orderBy(organization.name, organization.id),

    async roleIn(groupId: string, userId: string): Promise<string | null> {
      const rows = await db
        .select({ role: member.role })
        .from(member)
        .where(and(eq(member.organizationId, groupId), eq(member.userId, userId)));
      return rows[0]?.role ?? null;
    },

    async groupBySlug(slug: string): Promise<{ id: string } | null> {
      const rows = await db
        .select({ id: organization.id })
        .from(organization)
        .where(eq(organization.slug, slug));
      return rows[0] ?? null;
    },

    async createGroup(name: string, slug: string): Promise<string> {
      const id = randomUUID();
      await db.insert(organization).values({ id, name, slug });
      return id;
    },

    async hasPerson(email: string): Promise<boolean> {
      return (await db.$count(user, eq(user.email, email))) > 0;
    },

    /** Roles, as stored, of the people who have a password; without the people of these e-mails. */
    async rolesBeside(emails: readonly string[]): Promise<string[]> {
      const rows = await db
        .selectDistinct({ role: member.role })
        .from(member)
        .innerJoin(user, eq(user.id, member.userId))
        .innerJoin(account, eq(account.userId, user.id))
        .where(notInArray(user.email, [...emails]));
      return rows.map((row) => row.role);
    },

    /** Adds the person, or finds them by e-mail, sets the password and makes them a member with this role. */
    async admit(person: {
      name: string;
      email: string;
      passwordHash: string;
      groupId: string;
      role: string;
    }): Promise<string> {
      return db.transaction(async (tx) => {
        await tx
          .insert(user)
          .values({ id: randomUUID(), name: person.name, email: person.email, emailVerified: true })
          .onConflictDoNothing();
        const rows = await tx.select({ id: user.id }).from(user).where(eq(user.email, person.email));
        const id = rows[0]!.id;
        await tx
          .insert(account)
          .values({
            id: randomUUID(),
            accountId: id,
            providerId: 'credential',
            userId: id,
            password: person.passwordHash,
          })
          .onConflictDoUpdate({
            target: [account.providerId, account.accountId],
            set: { password: person.passwordHash, updatedAt: new Date() },
          });
        await tx
          .insert(member)
          .values({ id: randomUUID(), organizationId: person.groupId, userId: id, role: person.role })
          .onConflictDoNothing();
        return id;
      });
    },

    /** Takes away passwords and open sign-ins; the people and what they made stay. */
    async lockOut(emails: readonly string[]): Promise<void> {
      await db.transaction(async (tx) => {
        const rows = await tx
          .select({ id: user.id })
          .from(user)
          .where(inArray(user.email, [...emails]));
        const ids = rows.map((row) => row.id);
        if (ids.length === 0) return;
        await tx.delete(account).where(inArray(account.userId, ids));
        await tx.delete(session).where(inArray(session.userId, ids));
      });
    },
  };
}
export type People = ReturnType<typeof createPeople>;
