import { useQuery } from '@tanstack/react-query';
import { healthSchema, meSchema } from '../../server/contract/api';
import type { Health, Me } from '../../server/contract/api';
import { may } from '../../server/contract/roles';
import type { Action, Role } from '../../server/contract/roles';
import { api } from './api-client';

export const meKey = (): readonly unknown[] => ['me'];
export const healthKey = (): readonly unknown[] => ['health'];

export interface MeOptions {
  enabled?: boolean;
}

/** Who is signed in, with groups and roles; error 401 when nobody is. */
export function useMe({ enabled = true }: MeOptions = {}) {
  return useQuery<Me>({
    queryKey: meKey(),
    queryFn: ({ signal }) => api('/me', { signal, parse: meSchema.parse.bind(meSchema) }),
    staleTime: 60_000,
    enabled,
  });
}

/** The reader's role in a group; null while unknown or where not a member. */
export function useRole(groupSlug: string): Role | null {
  const me = useMe();
  return me.data?.groups.find((group) => group.slug === groupSlug)?.role ?? null;
}

/** Whether the reader may do this in the group; the server decides in the end. */
export function useMay(groupSlug: string, action: Action): boolean {
  return may(useRole(groupSlug), action);
}

/** Asked again every second while the server is still starting. */
export function useHealth() {
  return useQuery<Health>({
    queryKey: healthKey(),
    queryFn: ({ signal }) => api('/health', { signal, parse: healthSchema.parse.bind(healthSchema) }),
    refetchInterval: (query) => (query.state.data?.status === 'starting' ? 1000 : false),
  });
}
