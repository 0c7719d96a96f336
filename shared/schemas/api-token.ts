import { z } from "zod";
import { Name } from "./common";

/** What a token opens of all that its person may do. */
export const TOKEN_SCOPES = ["read-programme", "read-results", "enter-readings"] as const;
export const TokenScope = z.enum(TOKEN_SCOPES);
export type TokenScope = z.infer<typeof TokenScope>;

/** For how long a token may be made, days. */
export const TOKEN_DAYS = [7, 30, 90, 365] as const;

export const TokenInput = z.object({
  name: Name(100),
  scopes: z.array(TokenScope).min(1).max(TOKEN_SCOPES.length),
  /** A choice of a form is a text. */
  days: z.coerce
    .number()
    .int()
    .min(1)
    .max(Math.max(...TOKEN_DAYS)),
});
export type TokenInput = z.infer<typeof TokenInput>;

export const TokenView = z.object({
  id: z.uuid(),
  userId: z.uuid(),
  name: z.string(),
  scopes: z.array(TokenScope),
  createdAt: z.string(),
  expiresAt: z.string(),
  lastUsedAt: z.string().nullable(),
  state: z.enum(["works", "ended", "expired"]),
});
export type TokenView = z.infer<typeof TokenView>;

export const TokenFilter = z.object({ userId: z.uuid().optional() });
export const TokenList = z.object({ rows: z.array(TokenView) });
/** The token itself is in this answer and in no other. */
export const TokenMade = z.object({ token: z.string(), view: TokenView });
