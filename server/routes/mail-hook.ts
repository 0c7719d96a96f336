import { MailHookEvent, MailHookReply } from "../../shared/schemas/mail-event";
import { recordMailEvent } from "../commands/record-mail-event";
import type { Config } from "../config";
import { endpoint } from "../lib/endpoint";
import { issue, unprocessable } from "../lib/errors";
import {
  checkHook,
  HOOK_SIGNATURE_HEADER,
  HOOK_TIME_HEADER,
  readDeliveryReport,
} from "../lib/mail-hook";

export const MAIL_HOOK_PATH = "/hooks/mail";

/** Where mail servers and their providers say what became of a mail: no session, each report signed. */
export function defineMailHookRoutes(config: Pick<Config<"web">, "MAIL_HOOK_SECRETS">): void {
  endpoint.post(
    MAIL_HOOK_PATH,
    {
      summary: "What became of a mail: a signed event, or a delivery-status mail as it came",
      may: "public",
      storesNothing: true,
      reply: MailHookReply,
    },
    async ({ request }) => {
      const body = Buffer.isBuffer(request.body) ? request.body : Buffer.alloc(0);
      checkHook(
        config.MAIL_HOOK_SECRETS,
        request.get(HOOK_TIME_HEADER),
        request.get(HOOK_SIGNATURE_HEADER),
        body,
        new Date(),
      );
      if (request.is("message/rfc822")) {
        const report = await readDeliveryReport(body);
        // A person's answer to the return address, or another server's greeting: nothing to keep.
        if (!report) return { isKnown: false, isNew: false };
        return recordMailEvent(report, "report");
      }
      return recordMailEvent(readEvent(body), "hook");
    },
  );
}

function readEvent(body: Buffer): MailHookEvent {
  let value: unknown = null;
  try {
    value = JSON.parse(body.toString("utf8"));
  } catch {
    throw unprocessable([issue([], "not-json")]);
  }
  const parsed = MailHookEvent.safeParse(value);
  if (parsed.success) return parsed.data;
  throw unprocessable(
    parsed.error.issues.map(({ path, code }) => issue(path as (string | number)[], code)),
  );
}
