import type { SessionRole } from "../../../shared/schemas/session";
import { createQueryClient } from "../../lib/query-client";
import { sessionQuery } from "./session";

/** For tests: queries of somebody with one role, signed in. */
export function clientOf(role: SessionRole) {
  const client = createQueryClient();
  client.setQueryData(sessionQuery.queryKey, {
    pendingName: null,
    endedAt: null,
    user: {
      id: "01000000-0000-4000-8000-000000000001",
      name: "N. N.",
      email: null,
      language: "en",
      workerId: null,
      roles: [role],
      organizationName: "Ostmere",
      sites: [],
      visits: [],
    },
  });
  return client;
}
