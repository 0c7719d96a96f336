import type { HeadMail, KeeperPerson, KeeperView } from "../../shared/schemas/trail-keeper";
import { row, rows } from "../lib/db";
import { type Actor, abilities } from "../lib/policy";
import { keeperPolicy } from "../policies";

/** Mails that are listed: half a year of weeks. */
const MAILS_LIMIT = 26;

/** Who outside keeps the trail's head, and the mails that took it there. */
export async function keeperView(actor: Actor): Promise<KeeperView> {
  const { organizationId } = actor;
  const named = await row<
    { [Member in keyof KeeperPerson]: KeeperPerson[Member] | null } & { revision: number }
  >(
    `SELECT name, email, language, time_zone AS "timeZone", number AS revision FROM trail_keepers WHERE organization_id = :organizationId ORDER BY number DESC LIMIT 1`,
    { organizationId },
  );
  const zones = await rows<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE organization_id = :organizationId GROUP BY time_zone ORDER BY count(*) DESC, time_zone`,
    { organizationId },
  );
  const mails = await rows<
    Omit<HeadMail, "sentAt" | "seal"> & {
      sentAt: Date | null;
      number: number | null;
      hash: string | null;
    }
  >(
    `SELECT id, name, email, week::text AS week, state, sent_at AS "sentAt", last_error AS error, seal_number::int AS number, encode(seal_sha256, 'hex') AS hash
     FROM trail_mails WHERE organization_id = :organizationId AND kind = 'head' ORDER BY created_at DESC, id LIMIT ${MAILS_LIMIT}`,
    { organizationId },
  );
  const isNamed = named !== null && named.name !== null && named.email !== null;
  return {
    keeper: isNamed
      ? {
          name: named.name!,
          email: named.email!,
          language: named.language ?? "en",
          timeZone: named.timeZone ?? "UTC",
        }
      : null,
    revision: named?.revision ?? 0,
    timeZones: zones.map(({ timeZone }) => timeZone),
    mails: mails.map(({ number, hash, sentAt, ...mail }) => ({
      ...mail,
      seal: number !== null && hash !== null ? { number, hash } : null,
      sentAt: sentAt?.toISOString() ?? null,
    })),
    can: abilities(keeperPolicy, actor, {}),
  };
}
