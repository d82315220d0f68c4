import { randomBytes } from 'node:crypto';
import { addGroup, anyUserExists, groupBySlug } from '../../db/queries/groups';
import { ensureAccount } from '../auth/accounts';
import type { Deps } from '../deps';
import { derivedId } from '../ids';

/**
 * The first group and its lead, on a bench without demonstration. The lead gets a link by mail (into the outbox, while there is no mail
 * service) to choose a password.
 *
 * @returns whether they were made now
 */
export async function seedFirstGroup(deps: Deps): Promise<boolean> {
  const { first } = deps.config;
  if (first === null || (await anyUserExists(deps.db))) return false;
  const slug =
    first.groupName
      .toLowerCase()
      .normalize('NFKD')
      .replace(/[^a-z0-9]+/g, '-')
      .replace(/^-+|-+$/g, '')
      .slice(0, 40) || 'group';
  if ((await groupBySlug(deps.db, slug)) === null) {
    await addGroup(deps.db, { id: derivedId(`group ${slug}`), slug, name: first.groupName });
  }
  const group = (await groupBySlug(deps.db, slug))!;
  await ensureAccount(deps.db, deps.auth, {
    name: first.leadEmail.split('@')[0],
    email: first.leadEmail,
    // Nobody knows it: the lead chooses one by the link.
    password: randomBytes(24).toString('base64url'),
    groupId: group.id,
    role: 'lead',
  });
  await deps.auth.api.requestPasswordReset({ body: { email: first.leadEmail, redirectTo: '/' } });
  return true;
}
