import { QueryClient } from '@tanstack/react-query';
import { ApiError } from './api-client';

/** One cache a page load. Refusals are answers and are not asked again; only a silent server is. */
export function createQueryClient(): QueryClient {
  return new QueryClient({
    defaultOptions: {
      queries: {
        staleTime: 15_000,
        refetchOnWindowFocus: false,
        retry: (failures, error) =>
          failures < 2 && error instanceof ApiError && (error.status === 0 || error.status >= 502),
      },
      mutations: { retry: false },
    },
  });
}
