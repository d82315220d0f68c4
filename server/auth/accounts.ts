import { randomUUID } from 'node:crypto';
import type { Db } from '../../db/client';
import { addMember, userByEmail } from '../../db/queries/groups';
import type { Role } from '../contract/roles';
import type { Auth } from './auth';

/**
 * Makes a person who can sign in, and takes them into a group. Repeating it changes nothing.
 *
 * @returns the person's id
 */
export async function ensureAccount(
  db: Db,
  auth: Auth,
  person: { name: string; email: string; password: string; groupId: string; role: Role },
): Promise<string> {
  const context = await auth.$context;
  const email = person.email.toLowerCase();
  let user = await userByEmail(db, email);
  user ??= await context.internalAdapter.createUser(
    { name: person.name, email, emailVerified: true },
    { method: 'admin' },
  );
  // An interrupted start may have left a person without a password.
  const accounts = await context.internalAdapter.findAccounts(user.id);
  if (!accounts.some((account) => account.providerId === 'credential')) {
    await context.internalAdapter.linkAccount({
      userId: user.id,
      providerId: 'credential',
      accountId: user.id,
      password: await context.password.hash(person.password),
    });
  }
  await addMember(db, {
    id: randomUUID(),
    organizationId: person.groupId,
    userId: user.id,
    role: person.role,
  });
  return user.id;
}
