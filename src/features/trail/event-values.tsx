import { useLingui } from "@lingui/react";
import type { AuditEventView } from "../../../shared/schemas/audit-event";
import { type ValueWords, valueLines } from "./value-text";

/** More than this many stand folded. */
const SHOWN_OPEN = 2;

/** "Name: before → after" for what changed, "Name: value" for what was said. */
export function EventValues({
  values,
  words,
}: {
  values: AuditEventView["values"];
  words: ValueWords;
}) {
  const { i18n } = useLingui();
  if (values === null)
    return <span className="not-assessed">{i18n.t("personal values erased")}</span>;
  const lines = valueLines(words, values);
  const list = (
    <ul className="event-values">
      {lines.map(({ field, text, parts, before }) => (
        <li key={field}>
          <span className="event-field">{field}</span>{" "}
          {parts ? (
            <details>
              <summary className="link">{text}</summary>
              <ul>
                {parts.map((part) => (
                  <li key={part}>{part}</li>
                ))}
              </ul>
            </details>
          ) : before === null ? (
            text
          ) : (
            `${before} → ${text}`
          )}
        </li>
      ))}
    </ul>
  );
  if (lines.length <= SHOWN_OPEN) return list;
  return (
    <details>
      <summary className="link">
        {i18n.t("{count, plural, one {# value} other {# values}}", { count: lines.length })}
      </summary>
      {list}
    </details>
  );
}
