import { z } from "zod";
import { Can, Language, Name } from "./common";
import { RoleName } from "./session";

export const GrantInput = z.object({ role: RoleName, siteId: z.uuid().nullable().default(null) });

export const UserInput = z
  .object({
    name: Name(200),
    email: z.email().max(320).nullable().default(null),
    /** The provider's own name for the person, where it gives no verified e-mail. */
    expectedSubject: z.string().trim().min(1).max(255).nullable().default(null),
    workerId: z.uuid().nullable().default(null),
    language: Language.default("en"),
    grants: z.array(GrantInput).min(1).max(50),
  })
  .check((context) => {
    const { email, expectedSubject } = context.value;
    if (email === null && expectedSubject === null)
      context.issues.push({
        code: "custom",
        input: email,
        path: ["email"],
        params: { code: "email-or-subject" },
      });
  });
export type UserInput = z.infer<typeof UserInput>;

export const UserChange = z.object({
  name: Name(200),
  language: Language,
  workerId: z.uuid().nullable(),
  grants: z.array(GrantInput).max(50),
});

export const UserView = z.object({
  id: z.uuid(),
  name: z.string(),
  email: z.string().nullable(),
  expectedSubject: z.string().nullable(),
  isBound: z.boolean(),
  workerId: z.uuid().nullable(),
  workerName: z.string().nullable(),
  language: z.string(),
  grants: z.array(
    z.object({
      id: z.uuid(),
      /** `employer`: somebody of an outside employer, for a time. */
      role: z.enum([...RoleName.options, "employer"]),
      siteId: z.uuid().nullable(),
      siteName: z.string().nullable(),
      /** A visitor's, and when it ends. */
      year: z.number().nullable(),
      endsAt: z.string().nullable(),
      /** Of the sign-in service, where the role follows it. */
      groupName: z.string().nullable(),
      /** Within what whoever asks administers: theirs to take away. */
      isWithinReach: z.boolean(),
    }),
  ),
  lastSignInAt: z.string().nullable(),
  revokedAt: z.string().nullable(),
  revision: z.number(),
  can: Can("change", "revoke"),
});
export type UserView = z.infer<typeof UserView>;
export const UserList = z.object({ rows: z.array(UserView) });
export const OwnSettings = z.object({ language: Language });
