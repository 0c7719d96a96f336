import { useLingui } from "@lingui/react";
import type { AuditEventView } from "../../../shared/schemas/audit-event";

/** More than this many stand folded. */
const SHOWN_OPEN = 2;
/** A value longer than this is cut; the whole is in the export of the trail's record. */
const LONGEST_TEXT = 240;

const isChange = (value: unknown): value is { from: unknown; to: unknown } =>
  typeof value === "object" && value !== null && "from" in value && "to" in value;

function plain(value: unknown): string {
  if (value === null || value === undefined || value === "") return "–";
  const text = typeof value === "object" ? JSON.stringify(value) : String(value);
  return text.length > LONGEST_TEXT ? `${text.slice(0, LONGEST_TEXT)}…` : text;
}

/** `name: before → after` for what changed, `name: value` for what was said. Names and values are the record's own. */
export function EventValues({ values }: { values: AuditEventView["values"] }) {
  const { i18n } = useLingui();
  if (values === null)
    return <span className="not-assessed">{i18n.t("personal values erased")}</span>;
  const entries: [string, unknown][] =
    isChange(values) && Object.keys(values).length <= 3
      ? [
          [i18n.t("state"), { from: values.from, to: values.to }],
          ...Object.entries(values).filter(([name]) => name !== "from" && name !== "to"),
        ]
      : Object.entries(values);
  const list = (
    <ul className="event-values">
      {entries
        .filter(([, value]) => value !== null && value !== "")
        .map(([name, value]) => (
          <li key={name}>
            <span className="mono">{name}</span>{" "}
            {isChange(value) ? `${plain(value.from)} → ${plain(value.to)}` : plain(value)}
          </li>
        ))}
    </ul>
  );
  if (entries.length <= SHOWN_OPEN) return list;
  return (
    <details>
      <summary className="link">
        {i18n.t("{count, plural, one {# value} other {# values}}", { count: entries.length })}
      </summary>
      {list}
    </details>
  );
}
