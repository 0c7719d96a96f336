import { z } from "zod";

export const RoleName = z.enum([
  "officer",
  "supervisor",
  "worker",
  "auditor",
  "administrator",
  "representative",
]);
export type RoleName = z.infer<typeof RoleName>;

/** Roles, and what is none: who reads one year of a site for a while, or as an outside employer its people's results. */
export const SessionRole = z.enum([...RoleName.options, "visitor", "employer"]);
export type SessionRole = z.infer<typeof SessionRole>;

export const SiteRef = z.object({
  id: z.uuid(),
  name: z.string(),
  timeZone: z.string(),
  language: z.string(),
});

export const SessionView = z.object({
  user: z
    .object({
      id: z.uuid(),
      name: z.string(),
      email: z.string().nullable(),
      language: z.string(),
      workerId: z.uuid().nullable(),
      roles: z.array(SessionRole),
      organizationName: z.string(),
      sites: z.array(SiteRef),
      visits: z.array(z.object({ siteId: z.uuid(), year: z.number() })),
    })
    .nullable(),
  /** Somebody the provider vouched for, but to whom nothing is granted. */
  pendingName: z.string().nullable(),
  /** When access that was for a time ended, or was taken away while somebody was signed in. */
  endedAt: z.string().nullable(),
});
export type SessionView = z.infer<typeof SessionView>;
export type SessionUser = NonNullable<SessionView["user"]>;

export const SignInQuery = z.object({ returnTo: z.string().max(2000).optional() });
export const SignOutView = z.object({ redirectTo: z.string() });

export const WorkerCodeInput = z.object({
  employeeNumber: z.string().trim().min(1).max(40),
  code: z.string().trim().min(1).max(40),
});
