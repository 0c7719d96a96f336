import { QueryClient } from "@tanstack/react-query";
import { ApiError } from "./api";
import { isNoSuchAddress } from "./no-such-address";

/** What was refused will be refused again; what was not reached, or broke on the server, is tried twice more. */
function shouldRetry(failureCount: number, error: Error): boolean {
  const isWorthTrying = error instanceof ApiError && (error.status === 0 || error.status >= 502);
  return isWorthTrying && failureCount < 2;
}

export function createQueryClient(): QueryClient {
  return new QueryClient({
    defaultOptions: {
      queries: {
        retry: shouldRetry,
        staleTime: 15_000,
        // A page of what is not there is no page: the boundary around the pages shows that. What was there and is gone
        // stays where it stands, with a word about it.
        throwOnError: (error, { state }) => state.data === undefined && isNoSuchAddress(error),
      },
      // A change is sent again by its sender with the same key, never silently from here.
      mutations: { retry: false, networkMode: "always" },
    },
  });
}
