import { useLingui } from "@lingui/react";
import { RULE_SETS } from "../../../shared/rule-sets";

/** The title of a rule set; its key where this program no longer knows it. */
export function RuleSetTitle({ ruleSetKey }: { ruleSetKey: string }) {
  const { i18n } = useLingui();
  const found = RULE_SETS.find(({ key }) => key === ruleSetKey);
  return found ? i18n._(found.title) : ruleSetKey;
}

/** Where a rule says it, and whether that was read or is from memory. */
export function RuleSource({
  citation,
  sourceStatus,
}: {
  citation: string;
  sourceStatus: "read" | "from-memory";
}) {
  const { i18n } = useLingui();
  return (
    <>
      {citation}
      {sourceStatus === "from-memory" && (
        <span className="visitor-mail">{i18n.t("from memory")}</span>
      )}
    </>
  );
}
