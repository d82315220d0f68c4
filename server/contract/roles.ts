/**
 * Who may do what. The server enforces this table, the client shows only what it allows, and the documentation prints it.
 */
export const roles = ['lead', 'analyst', 'technician', 'student'] as const;
export type Role = (typeof roles)[number];

export const actions = [
  'group.read',
  'member.list',
  'member.manage',
  'station.read',
  'station.create',
  'station.change',
  'station.delete',
  'setUp.add',
  'layout.save',
  'rawFile.upload',
  'rawFile.withdraw',
  'rawFile.download',
  'recipe.save',
  'run.start',
  'run.cancel',
  'run.delete',
  'result.read',
  'result.export',
] as const;
export type Action = (typeof actions)[number];

const everyone: readonly Role[] = roles;

export const policyTable: Record<Action, readonly Role[]> = {
  'group.read': everyone,
  'member.list': everyone,
  'member.manage': ['lead'],
  'station.read': everyone,
  'station.create': ['lead', 'analyst', 'technician'],
  'station.change': ['lead', 'analyst', 'technician'],
  'station.delete': ['lead'],
  'setUp.add': ['lead', 'analyst', 'technician'],
  'layout.save': ['lead', 'analyst', 'technician'],
  'rawFile.upload': ['lead', 'analyst', 'technician'],
  'rawFile.withdraw': ['lead', 'analyst'],
  'rawFile.download': everyone,
  'recipe.save': ['lead', 'analyst'],
  'run.start': ['lead', 'analyst', 'technician'],
  'run.cancel': ['lead', 'analyst', 'technician'],
  'run.delete': ['lead', 'analyst'],
  'result.read': everyone,
  'result.export': everyone,
};

export function may(role: Role | null | undefined, action: Action): boolean {
  return role != null && policyTable[action].includes(role);
}

/** What each role is for, in a sentence. */
export const roleLabels: Record<Role, { label: string; purpose: string }> = {
  lead: { label: 'Lead', purpose: 'judges results, manages members, may delete' },
  analyst: { label: 'Analyst', purpose: 'brings in records, makes recipes, computes' },
  technician: { label: 'Technician', purpose: 'sets stations up, brings in records' },
  student: { label: 'Student', purpose: 'reads, asks why, exports' },
};
