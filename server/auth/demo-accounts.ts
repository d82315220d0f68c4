import type { Role } from '../contract/roles';

/** Invented people of the demonstration. Their passwords are known to everybody and work on loopback only. */
export const DEMO_DOMAIN = '@lowmere.example';

export const demoAccounts: readonly { role: Role; name: string; email: string; password: string }[] = [
  { role: 'lead', name: 'Maren Oake', email: `lead${DEMO_DOMAIN}`, password: 'heron-over-sedge' },
  { role: 'analyst', name: 'Tobin Reyle', email: `analyst${DEMO_DOMAIN}`, password: 'quiet-spectrum' },
  {
    role: 'technician',
    name: 'Isla Fenwick',
    email: `technician${DEMO_DOMAIN}`,
    password: 'level-boom-north',
  },
  { role: 'student', name: 'Noor Halden', email: `student${DEMO_DOMAIN}`, password: 'why-was-it-flagged' },
];

export function isDemoEmail(email: string): boolean {
  return email.toLowerCase().endsWith(DEMO_DOMAIN);
}
