import type { Request, RequestHandler, Response } from 'express';
import { z } from 'zod';
import type { GroupRow } from '../../db/queries/groups';
import { membership } from '../../db/queries/groups';
import type { Person } from '../auth/session';
import { authenticate } from '../auth/session';
import type { Action, Role } from '../contract/roles';
import type { Deps } from '../deps';
import { AppError, notFound } from '../errors';
import { authorise, isRole } from '../policies/authorise';

/**
 * Every route is one entry of a table, and every entry is served by the same chain: rate limit → who is it → is it well formed → may
 * they → the service → what of it goes out. The tests walk the same table, so a route cannot be added beside it.
 */

export type Method = 'get' | 'post' | 'patch' | 'delete';

/** Who asks, in which group, as what. */
export interface GroupContext {
  deps: Deps;
  person: Person;
  group: GroupRow;
  role: Role;
}

export interface SignedInContext {
  deps: Deps;
  person: Person;
}

/** JSON with its status, or a function that writes the answer itself (files, events). */
export type Answer = { status: number; body?: unknown } | ((res: Response) => Promise<void>);

export const ok = (body: unknown): Answer => ({ status: 200, body });
export const created = (body: unknown, isNew = true): Answer => ({ status: isNew ? 201 : 200, body });
export const empty: Answer = { status: 204 };

type Shape = z.ZodType;
type Parsed<S extends Shape | undefined> = S extends Shape ? z.infer<S> : undefined;

interface Spec<P extends Shape | undefined, Q extends Shape | undefined, B extends Shape | undefined> {
  method: Method;
  path: string;
  params?: P;
  query?: Q;
  body?: B;
}

export interface Input<P, Q, B> {
  params: P;
  query: Q;
  body: B;
  req: Request;
}

export interface RouteEntry {
  method: Method;
  /** As Express sees it. */
  path: string;
  access: Action | 'signed-in' | 'public';
  handler(deps: Deps): RequestHandler;
}

export const GROUP_PREFIX = '/api/groups/:group';

/** A route inside a group: only members get past the group's name, and only with a role that may do `action`. */
export function groupRoute<
  P extends Shape | undefined = undefined,
  Q extends Shape | undefined = undefined,
  B extends Shape | undefined = undefined,
>(
  spec: Spec<P, Q, B> & {
    action: Action;
    handle: (context: GroupContext, input: Input<Parsed<P>, Parsed<Q>, Parsed<B>>) => Promise<Answer>;
  },
): RouteEntry {
  return {
    method: spec.method,
    path: `${GROUP_PREFIX}${spec.path}`,
    access: spec.action,
    handler: (deps) => async (req, res) => {
      const person = await authenticate(deps, req);
      const input = parseInput(spec, req);
      const member = await membership(deps.db, String(req.params.group), person.id);
      // A group that one is not in does not exist for one.
      if (member === null || !isRole(member.role)) throw notFound('group');
      authorise(member.role, spec.action);
      await send(res, await spec.handle({ deps, person, group: member.group, role: member.role }, input));
    },
  };
}

/** A route for anybody who is signed in. */
export function signedInRoute(spec: {
  method: Method;
  path: string;
  handle: (context: SignedInContext) => Promise<Answer>;
}): RouteEntry {
  return {
    method: spec.method,
    path: spec.path,
    access: 'signed-in',
    handler: (deps) => async (req, res) => {
      const person = await authenticate(deps, req);
      await send(res, await spec.handle({ deps, person }));
    },
  };
}

export function publicRoute(spec: {
  method: Method;
  path: string;
  handle: (deps: Deps, req: Request) => Promise<Answer>;
}): RouteEntry {
  return {
    method: spec.method,
    path: spec.path,
    access: 'public',
    handler: (deps) => async (req, res) => send(res, await spec.handle(deps, req)),
  };
}

function parseInput<P extends Shape | undefined, Q extends Shape | undefined, B extends Shape | undefined>(
  spec: Spec<P, Q, B>,
  req: Request,
): Input<Parsed<P>, Parsed<Q>, Parsed<B>> {
  // An id or slug that cannot exist is one that does not.
  const params = spec.params?.safeParse(req.params);
  if (params && !params.success) throw notFound('address');
  return {
    params: params?.data as Parsed<P>,
    query: (spec.query ? parsePart(spec.query, req.query) : undefined) as Parsed<Q>,
    body: (spec.body ? parsePart(spec.body, req.body ?? {}) : undefined) as Parsed<B>,
    req,
  };
}

/** @throws AppError invalid_input with the fields that are wrong */
export function parsePart<S extends Shape>(schema: S, value: unknown): z.infer<S> {
  const parsed = schema.safeParse(value);
  if (parsed.success) return parsed.data;
  const fields = parsed.error.issues.map((issue) => ({ path: issue.path.join('.'), message: issue.message }));
  throw new AppError('invalid_input', {
    message: `invalid: ${fields.map((field) => `${field.path}: ${field.message}`).join('; ')}`,
    userMessage:
      'Something in the request is not as it must be. Nothing was changed. The fields say what to correct.',
    fields,
  });
}

async function send(res: Response, answer: Answer): Promise<void> {
  if (typeof answer === 'function') return answer(res);
  if (answer.body === undefined) res.status(answer.status).end();
  else res.status(answer.status).json(answer.body);
}

export const stationParams = z.object({ station: z.string().min(1).max(40) });
export const idParams = z.object({ id: z.uuid() });
