import { createAccessControl } from 'better-auth/plugins/access';
import type { Role } from '../contract/roles';

/**
 * The group plugin wants roles of its own. Its routes are closed (see `open-routes.ts`), so none of them may do anything there: what a
 * role may do stands in the contract's policy table alone.
 */
export const accessControl = createAccessControl({ group: ['none'] } as const);

const nothing = accessControl.newRole({ group: [] });

export const pluginRoles: Record<Role, typeof nothing> = {
  lead: nothing,
  analyst: nothing,
  technician: nothing,
  student: nothing,
};
