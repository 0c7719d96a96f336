import { z } from "zod";

export const RoleName = z.enum(["officer", "supervisor", "worker", "auditor", "administrator"]);
export type RoleName = z.infer<typeof RoleName>;

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
      roles: z.array(RoleName),
      organizationName: z.string(),
      sites: z.array(SiteRef),
    })
    .nullable(),
  /** Somebody the provider vouched for, but to whom nothing is granted. */
  pendingName: z.string().nullable(),
});
export type SessionView = z.infer<typeof SessionView>;
export type SessionUser = NonNullable<SessionView["user"]>;

export const SignInQuery = z.object({ returnTo: z.string().max(2000).optional() });
export const SignOutView = z.object({ redirectTo: z.string() });

export const WorkerCodeInput = z.object({
  employeeNumber: z.string().trim().min(1).max(40),
  code: z.string().trim().min(1).max(40),
});
