import { type QueryClient, queryOptions, useQuery } from "@tanstack/react-query";
import type { Locale } from "../../../shared/i18n/index";
import type { SessionRole, SessionUser, SessionView } from "../../../shared/schemas/session";
import { ApiError, api, connectionEvents, isUnreached, noReply } from "../../lib/api";
import { rememberChoice } from "../../lib/i18n";
import { forgetTyped } from "../../lib/keep-typed";
import { forgetKept } from "../../lib/kept-list";
import { keepSeenFor } from "../../lib/last-seen";

const isSession = (value: unknown): value is SessionView =>
  typeof value === "object" && value !== null && "user" in value && "pendingName" in value;

/** Checked by hand: the first page of every role asks it, and the whole of zod would be most of that page. */
const sessionReply = {
  parse(value: unknown): SessionView {
    if (isSession(value)) return value;
    throw new Error("the session is not as expected");
  },
};

const HERE = "dinward.here";

/** Whoever has a crew works without a connection too; this device remembers them until they sign out or are signed out. */
function rememberWhoIsHere(session: Pick<SessionView, "user">): void {
  const { user } = session;
  const isKept = user !== null && hasRole(user, "supervisor", "officer");
  keepSeenFor(isKept ? user.id : null);
  try {
    if (isKept) localStorage.setItem(HERE, JSON.stringify(session));
    else localStorage.removeItem(HERE);
  } catch {
    // A browser without storage: without a connection there is then no page.
  }
}

/** An answer that comes after the sign-out was asked for before: nothing is remembered of it any more. */
let hasSignedOut = false;

function whoWasHere(): SessionView | null {
  try {
    return sessionReply.parse(JSON.parse(localStorage.getItem(HERE) ?? "null"));
  } catch {
    return null;
  }
}

async function askWhoIsHere(signal: AbortSignal): Promise<SessionView> {
  try {
    const session = await api.get("/session", {
      schema: sessionReply,
      signal,
      asksWhoIsThere: true,
    });
    if (!hasSignedOut) rememberWhoIsHere(session);
    return session;
  } catch (error) {
    const last = isUnreached(error) ? whoWasHere() : null;
    if (!last) throw error;
    keepSeenFor(last.user?.id ?? null);
    return last;
  }
}

const sessionKey = ["session"];

export const sessionQuery = queryOptions({
  queryKey: sessionKey,
  async queryFn({ signal, client }) {
    const before = client.getQueryData<SessionView>(sessionKey);
    const now = await askWhoIsHere(signal);
    if (now.user || !before?.user || hasSignedOut) return now;
    // A session that ends moves nobody: what is typed stays, and the top of the page says what happened.
    connectionEvents.tell(now.endedAt ? "access-over" : "session-expired");
    return before;
  },
  staleTime: 60_000,
  networkMode: "always",
});

/** What is refused may have been taken away since: who may do what is asked anew. */
export function watchRoles(client: QueryClient): void {
  const askAnew = (error: unknown) => {
    if (error instanceof ApiError && error.status === 403)
      void client.invalidateQueries({ queryKey: sessionQuery.queryKey });
  };
  client.getQueryCache().subscribe((event) => {
    if (event.type === "updated" && event.action.type === "error") askAnew(event.action.error);
  });
  client.getMutationCache().subscribe((event) => {
    if (event.type === "updated" && event.action.type === "error") askAnew(event.action.error);
  });
}

/** Whoever is signed in. Pages inside the signed-in part always have somebody. */
export function useUser(): SessionUser {
  const { data } = useQuery(sessionQuery);
  if (!data?.user) throw new Error("nobody is signed in here");
  return data.user;
}

export const hasRole = (user: Pick<SessionUser, "roles">, ...roles: SessionRole[]): boolean =>
  user.roles.some((role) => roles.includes(role));

/** Ends the session; what this device kept of the user goes with it. */
export async function signOut(userId?: string): Promise<void> {
  const { redirectTo } = await api.post("/auth/sign-out", {
    schema: { parse: (value) => value as { redirectTo: string } },
  });
  hasSignedOut = true;
  forgetTyped();
  if (userId !== undefined) forgetKept(localStorage, userId);
  rememberWhoIsHere({ user: null });
  window.location.assign(redirectTo);
}

/** The language chosen here is also that of the mails. Where it can't be kept now, the next start tries again. */
export async function keepLanguage(language: Locale): Promise<void> {
  await api
    .put("/me/settings", { body: { language }, schema: noReply })
    .catch(() => rememberChoice(language));
}
