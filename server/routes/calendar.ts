import { createHash } from "node:crypto";
import { z } from "zod";
import { dutyWord } from "../../shared/findings/duty-words";
import { createI18n, isLocale } from "../../shared/i18n";
import { CalendarFeedMade, CalendarFeedView } from "../../shared/schemas/duty";
import { loadActor } from "../auth/actor";
import { endCalendarFeed, makeCalendarFeed } from "../commands/make-calendar-feed";
import type { Config } from "../config";
import { type CalendarEntry, writeCalendar } from "../exports/icalendar";
import { inTransaction, row } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { AppError, notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { organizationOfSecret, secretHash } from "../lib/secret";
import { may } from "../policies";
import { listDuties } from "../queries/duties";

/** More than anybody's calendar shows; the list has all. */
const ENTRIES_AT_MOST = 1000;

const SecretParams = z.object({ secret: z.string().regex(/^[\w-]{40,80}\.ics$/) });

async function feedOf(actor: Actor): Promise<z.input<typeof CalendarFeedView>> {
  const feed = await row<{ createdAt: Date }>(
    `SELECT created_at AS "createdAt" FROM calendar_feeds WHERE user_id = :userId AND revoked_at IS NULL`,
    { userId: actor.userId },
  );
  return { madeAt: feed?.createdAt.toISOString() ?? null };
}

/** What is due to the person whose secret it is, as granted at this moment. */
async function calendarOf(secret: string, publicUrl: string): Promise<string> {
  const feed = await row<{ userId: string; epoch: number; madeAt: Date }>(
    `SELECT c.user_id AS "userId", u.session_epoch AS epoch, c.created_at AS "madeAt" FROM calendar_feeds c JOIN users u ON u.id = c.user_id
     WHERE c.secret_hash = decode(:hash, 'hex') AND c.revoked_at IS NULL AND u.revoked_at IS NULL`,
    { hash: secretHash(secret).toString("hex") },
  );
  if (!feed) throw notFound();
  const actor = await loadActor(feed.userId, feed.epoch).catch((error: unknown) => {
    throw error instanceof AppError ? notFound() : error;
  });
  if (!may.readCrews(actor)) throw notFound();
  const locale = isLocale(actor.language) ? actor.language : "en";
  const i18n = await createI18n(locale);
  const duties = await listDuties(actor, { limit: ENTRIES_AT_MOST });
  const entries = duties.rows.map((item): CalendarEntry => {
    const about = item.worker?.name ?? item.what;
    const word = dutyWord(i18n, item);
    return {
      uid: `${item.key.replaceAll(" ", "-")}@dinward`,
      date: item.dueOn,
      summary: about === null ? word : `${word}: ${about}`,
      url: `${publicUrl}/due`,
    };
  });
  return writeCalendar("Dinward", feed.madeAt, entries);
}

export function defineCalendarRoutes({ PUBLIC_URL }: Pick<Config<"web">, "PUBLIC_URL">): void {
  endpoint.get(
    "/me/calendar",
    {
      summary: "Whether there is a private calendar address of one's own",
      may: may.readCrews,
      reply: CalendarFeedView,
    },
    ({ actor }) => feedOf(actor),
  );

  endpoint.post(
    "/me/calendar",
    {
      summary: "Make a private calendar address; the one before leads nowhere from then on",
      may: may.readCrews,
      body: z.object({}),
      reply: CalendarFeedMade,
      isReplySecret: true,
    },
    async ({ actor }) => ({
      address: `${PUBLIC_URL}/api/calendar/${await makeCalendarFeed(actor)}.ics`,
      ...(await feedOf(actor)),
    }),
  );

  endpoint.post(
    "/me/calendar/end",
    {
      summary: "End the private calendar address",
      may: may.readCrews,
      body: z.object({}),
      reply: CalendarFeedView,
      status: 200,
    },
    async ({ actor }) => {
      await endCalendarFeed(actor);
      return feedOf(actor);
    },
  );

  endpoint.get(
    "/calendar/:secret",
    {
      summary: "What is due, as a calendar (iCalendar), by its private address",
      may: "public",
      params: SecretParams,
    },
    async ({ params, request, response }) => {
      const secret = params.secret.slice(0, -".ics".length);
      const organizationId = organizationOfSecret(secret);
      if (organizationId === null) throw notFound();
      const text = await inTransaction({ organizationId, readOnly: true }, () =>
        calendarOf(secret, PUBLIC_URL),
      );
      response
        .set("ETag", `"${createHash("sha256").update(text).digest("hex").slice(0, 32)}"`)
        .set("Cache-Control", "private, no-cache")
        .type("text/calendar; charset=utf-8");
      if (request.fresh) response.status(304).end();
      else response.send(text);
    },
  );
}
