import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import { EntryNotices, NoticeAction, NoticeText } from "../../shared/schemas/notice";
import { handleNotices } from "../commands/handle-notice";
import type { Config } from "../config";
import { noticeMail } from "../jobs/send-notice";
import { rows } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { type Actor, authorize, findVisible, visible } from "../lib/policy";
import { Notice } from "../models/finding";
import { may, noticePolicy } from "../policies";
import { entryNotices } from "../queries/entry-notices";

const EntryParams = z.object({ entryId: z.uuid() });
const EntryAction = z.discriminatedUnion("action", [
  // Told in another way is one person each time.
  z.object({ action: NoticeAction.extract(["give-on-paper"]), noticeId: z.uuid() }),
  z.object({
    action: NoticeAction.exclude(["give-on-paper"]),
    /** Only this one of the entry's notices; null: all of them. */
    noticeId: z.uuid().nullable().default(null),
  }),
]);

/** The notices of an entry, if they are this officer's to see and handle. */
async function noticesOf(actor: Actor, entryId: string): Promise<string[]> {
  const found = await rows<{ id: string; siteId: string }>(
    `SELECT n.id, n.site_id AS "siteId" FROM notices n WHERE n.entry_id = :entryId AND ${visible(noticePolicy, actor, "n")}`,
    { entryId },
  );
  if (found.length === 0) throw notFound();
  for (const notice of found) authorize(noticePolicy, actor, "handle", notice);
  return found.map(({ id }) => id);
}

export function defineNoticeRoutes(config: Pick<Config<"web">, "PUBLIC_URL">): void {
  endpoint.get(
    "/entries/:entryId/notices",
    {
      summary: "Whom an entry will tell",
      may: may.officer,
      params: EntryParams,
      reply: EntryNotices,
    },
    async ({ actor, params }) => {
      await noticesOf(actor, params.entryId);
      return entryNotices(params.entryId);
    },
  );

  endpoint.post(
    "/entries/:entryId/notices/actions",
    {
      summary: "Hold or send what an entry will tell",
      may: may.officer,
      params: EntryParams,
      body: EntryAction,
      reply: EntryNotices,
    },
    async ({ actor, params, body }) => {
      const all = await noticesOf(actor, params.entryId);
      const asked = all.filter((id) => body.noticeId === null || id === body.noticeId);
      if (asked.length === 0) throw notFound();
      await handleNotices(actor, asked, body.action);
      return entryNotices(params.entryId);
    },
  );

  endpoint.get(
    "/notices/:id",
    {
      summary: "A notice as it was sent, or as it would read now",
      may: may.readDays,
      params: IdParams,
      reply: NoticeText,
    },
    async ({ actor, params }) => {
      const notice = await findVisible(Notice, noticePolicy, params.id, actor);
      if (notice.subject !== null)
        return {
          subject: notice.subject,
          text: notice.bodyText ?? "",
          html: notice.bodyHtml ?? "",
          isSent: true,
        };
      return { ...(await noticeMail(notice.id, config.PUBLIC_URL)), isSent: false };
    },
  );
}
