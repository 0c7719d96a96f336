import type { Language } from "../../shared/schemas/common";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";

export async function setOwnLanguage(actor: Actor, language: Language): Promise<void> {
  if (actor.language === language) return;
  await execute("UPDATE users SET language = $2, revision = revision + 1 WHERE id = $1", [
    actor.userId,
    language,
  ]);
  const values = { language: { from: actor.language, to: language } };
  await recordAudit(actor, {
    action: "set-own-language",
    subjectKind: "user",
    subjectId: actor.userId,
    values,
  });
}
