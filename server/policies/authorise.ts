import type { Action, Role } from '../contract/roles';
import { may, roleLabels, roles } from '../contract/roles';
import { AppError } from '../errors';

export function isRole(text: string): text is Role {
  return (roles as readonly string[]).includes(text);
}

/** What each action is called when it is refused. */
const deeds: Record<Action, string> = {
  'group.read': 'see this group',
  'member.list': 'see the members',
  'member.manage': 'manage members',
  'station.read': 'see stations',
  'station.create': 'create stations',
  'station.change': 'change stations',
  'station.delete': 'delete stations',
  'setUp.add': 'change a set-up',
  'layout.save': 'save layouts',
  'rawFile.upload': 'bring in raw files',
  'rawFile.withdraw': 'withdraw raw files or bring them back',
  'rawFile.download': 'download raw files',
  'recipe.save': 'save recipes',
  'run.start': 'start runs',
  'run.cancel': 'stop runs',
  'run.delete': 'delete runs',
  'result.read': 'see results',
  'result.export': 'export results',
};

/**
 * Refuses what the policy table does not allow. Pure: role and action decide alone.
 *
 * @throws AppError not_allowed
 */
export function authorise(role: Role, action: Action): void {
  if (may(role, action)) return;
  throw new AppError('not_allowed', {
    message: `role ${role} may not ${action}`,
    userMessage: `As ${roleLabels[role].label.toLowerCase()} you cannot ${deeds[action]}. Nothing was changed. A lead of the group can do it or change your role.`,
  });
}
