import { z } from "zod";
import { Language, Name } from "./common";

/** Somebody outside who gets the trail's head by mail every week. */
export const KeeperPerson = z.object({
  name: Name(200),
  email: z.email().max(320),
  language: Language.default("en"),
  /** Of one of the organization's sites: its Monday morning is when the mail goes. */
  timeZone: z.string().min(1).max(100),
});
export type KeeperPerson = z.infer<typeof KeeperPerson>;

/** Null: nobody keeps it. */
export const KeeperInput = z.object({ keeper: KeeperPerson.nullable() });
export type KeeperInput = z.infer<typeof KeeperInput>;

export const HeadMail = z.object({
  id: z.uuid(),
  name: z.string(),
  email: z.string(),
  /** The Monday of its week. */
  week: z.string(),
  state: z.enum(["waiting", "sent", "refused", "bounced"]),
  /** Null: not written yet. */
  seal: z.object({ number: z.number(), hash: z.string() }).nullable(),
  sentAt: z.string().nullable(),
  error: z.string().nullable(),
});
export type HeadMail = z.infer<typeof HeadMail>;

export const KeeperView = KeeperInput.extend({
  /** 0 before anybody was named. */
  revision: z.number(),
  timeZones: z.array(z.string()),
  /** The latest first. */
  mails: z.array(HeadMail),
  can: z.object({ change: z.boolean() }),
});
export type KeeperView = z.infer<typeof KeeperView>;
