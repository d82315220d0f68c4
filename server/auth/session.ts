import { fromNodeHeaders } from 'better-auth/node';
import type { Request } from 'express';
import { userById } from '../../db/queries/groups';
import type { Deps } from '../deps';
import { AppError } from '../errors';
import { isDemoEmail } from './demo-accounts';
import { isFromLoopback } from './loopback';

export interface Person {
  id: string;
  name: string;
  email: string;
}

/**
 * Who sends this request: the owner of an API key (`x-api-key`) or of a session cookie.
 *
 * @throws AppError not_signed_in, or not_allowed when a browser sends a change from a page that is not ours
 */
export async function authenticate(deps: Deps, req: Request): Promise<Person> {
  const key = req.get('x-api-key');
  const person = key === undefined ? await bySession(deps, req) : await byKey(deps, key);
  if (person === null) {
    throw new AppError('not_signed_in', {
      userMessage:
        'You are not signed in, or the sign-in has expired. Nothing was changed. Sign in and try again.',
    });
  }
  if (isDemoEmail(person.email) && !isFromLoopback(req)) {
    throw new AppError('not_signed_in', {
      message: 'demo account from elsewhere',
      userMessage: 'Demonstration accounts work only on the machine that Gustbook runs on.',
    });
  }
  return person;
}

async function byKey(deps: Deps, key: string): Promise<Person | null> {
  const answer = await deps.auth.api.verifyApiKey({ body: { key } });
  return answer.valid && answer.key ? userById(deps.db, answer.key.referenceId) : null;
}

async function bySession(deps: Deps, req: Request): Promise<Person | null> {
  const session = await deps.auth.api.getSession({ headers: fromNodeHeaders(req.headers) });
  if (session === null) return null;
  refuseForeignPage(deps, req);
  return { id: session.user.id, name: session.user.name, email: session.user.email };
}

/** Cookies travel with requests that other sites make a browser send: such a request may not change anything. */
function refuseForeignPage(deps: Deps, req: Request): void {
  if (req.method === 'GET' || req.method === 'HEAD') return;
  const origin = req.get('origin');
  const site = req.get('sec-fetch-site');
  const isForeign =
    origin !== undefined
      ? !deps.trustedOrigins.includes(origin)
      : site !== undefined && site !== 'same-origin' && site !== 'none';
  if (!isForeign) return;
  throw new AppError('not_allowed', {
    message: `change from foreign page ${origin ?? site}`,
    userMessage:
      'This request came from a page of another address, so nothing was changed. Open Gustbook at its own address and try again.',
  });
}
