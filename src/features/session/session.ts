import { queryOptions, useQuery } from "@tanstack/react-query";
import type { Locale } from "../../../shared/i18n/index";
import type { RoleName, SessionUser, SessionView } from "../../../shared/schemas/session";
import { api, noReply } from "../../lib/api";
import { rememberChoice } from "../../lib/i18n";
import { forgetTyped } from "../../lib/keep-typed";

const isSession = (value: unknown): value is SessionView =>
  typeof value === "object" && value !== null && "user" in value && "pendingName" in value;

/** Checked by hand: the first page of every role asks it, and the whole of zod would be most of that page. */
const sessionReply = {
  parse(value: unknown): SessionView {
    if (isSession(value)) return value;
    throw new Error("the session is not as expected");
  },
};

export const sessionQuery = queryOptions({
  queryKey: ["session"],
  queryFn: ({ signal }) =>
    api.get("/session", { schema: sessionReply, signal, asksWhoIsThere: true }),
  staleTime: 60_000,
});

/** Whoever is signed in. Pages inside the signed-in part always have somebody. */
export function useUser(): SessionUser {
  const { data } = useQuery(sessionQuery);
  if (!data?.user) throw new Error("nobody is signed in here");
  return data.user;
}

export const hasRole = (user: Pick<SessionUser, "roles">, ...roles: RoleName[]): boolean =>
  user.roles.some((role) => roles.includes(role));

export async function signOut(): Promise<void> {
  const { redirectTo } = await api.post("/auth/sign-out", {
    schema: { parse: (value) => value as { redirectTo: string } },
  });
  forgetTyped();
  window.location.assign(redirectTo);
}

/** The language chosen here is also that of the mails. Where it can't be kept now, the next start tries again. */
export async function keepLanguage(language: Locale): Promise<void> {
  await api
    .put("/me/settings", { body: { language }, schema: noReply })
    .catch(() => rememberChoice(language));
}
