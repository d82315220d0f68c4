import { groupsOf } from '../../db/queries/groups';
import { demoAccounts } from '../auth/demo-accounts';
import { isFromLoopback } from '../auth/loopback';
import { isLoopbackHost } from '../config';
import type { Health, Me } from '../contract/api';
import { softwareVersion } from '../paths';
import { isRole } from '../policies/authorise';
import { ok, publicRoute, signedInRoute } from './route';

export const meRoutes = [
  publicRoute({
    method: 'get',
    path: '/api/health',
    handle: async (deps, req) => {
      const tellsDemo = deps.startUp.hasDemo && isLoopbackHost(deps.config.host) && isFromLoopback(req);
      return ok({
        status: deps.startUp.ready ? 'ready' : 'starting',
        version: softwareVersion,
        demo: tellsDemo ? { signIns: demoAccounts.map((account) => ({ ...account })) } : null,
        progress: deps.startUp.progress,
      } satisfies Health);
    },
  }),
  signedInRoute({
    method: 'get',
    path: '/api/me',
    handle: async ({ deps, person }) => {
      const groups = (await groupsOf(deps.db, person.id)).flatMap(({ slug, name, role }) =>
        isRole(role) ? [{ slug, name, role }] : [],
      );
      return ok({ user: { id: person.id, name: person.name, email: person.email }, groups } satisfies Me);
    },
  }),
];
