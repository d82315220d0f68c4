import { and, asc, eq } from 'drizzle-orm';
import type { Db } from '../client';
import { member, organization, user } from '../schema';

export interface GroupRow {
  id: string;
  slug: string;
  name: string;
}

export async function groupBySlug(db: Db, slug: string): Promise<GroupRow | null> {
  const rows = await db
    .select({ id: organization.id, slug: organization.slug, name: organization.name })
    .from(organization)
    .where(eq(organization.slug, slug));
  return rows[0] ?? null;
}

/** Group and role in one look; null when there is no such group or the person is not in it: both are one to the outside. */
export async function membership(
  db: Db,
  slug: string,
  userId: string,
): Promise<{ group: GroupRow; role: string } | null> {
  const rows = await db
    .select({ id: organization.id, slug: organization.slug, name: organization.name, role: member.role })
    .from(organization)
    .innerJoin(member, and(eq(member.organizationId, organization.id), eq(member.userId, userId)))
    .where(eq(organization.slug, slug));
  const row = rows[0];
  return row ? { group: { id: row.id, slug: row.slug, name: row.name }, role: row.role } : null;
}

export async function groupsOf(
  db: Db,
  userId: string,
): Promise<{ slug: string; name: string; role: string }[]> {
  return db
    .select({ slug: organization.slug, name: organization.name, role: member.role })
    .from(member)
    .innerJoin(organization, eq(organization.id, member.organizationId))
    .where(eq(member.userId, userId))
    .orderBy(asc(organization.name));
}

export async function membersOf(
  db: Db,
  groupId: string,
): Promise<{ userId: string; name: string; email: string; role: string }[]> {
  return db
    .select({ userId: user.id, name: user.name, email: user.email, role: member.role })
    .from(member)
    .innerJoin(user, eq(user.id, member.userId))
    .where(eq(member.organizationId, groupId))
    .orderBy(asc(user.name));
}

export async function anyUserExists(db: Db): Promise<boolean> {
  return (await db.select({ id: user.id }).from(user).limit(1)).length > 0;
}

export async function userById(
  db: Db,
  id: string,
): Promise<{ id: string; name: string; email: string } | null> {
  const rows = await db
    .select({ id: user.id, name: user.name, email: user.email })
    .from(user)
    .where(eq(user.id, id));
  return rows[0] ?? null;
}

export async function userByEmail(db: Db, email: string): Promise<{ id: string; name: string } | null> {
  const rows = await db.select({ id: user.id, name: user.name }).from(user).where(eq(user.email, email));
  return rows[0] ?? null;
}

/** Creates a group; a second time it is left as it is. */
export async function addGroup(db: Db, group: GroupRow): Promise<void> {
  await db
    .insert(organization)
    .values({ ...group, createdAt: new Date() })
    .onConflictDoNothing();
}

/** Takes a person into a group; a second time it is left as it is. */
export async function addMember(
  db: Db,
  row: { id: string; organizationId: string; userId: string; role: string },
): Promise<void> {
  await db
    .insert(member)
    .values({ ...row, createdAt: new Date() })
    .onConflictDoNothing();
}
