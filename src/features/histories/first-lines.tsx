import { useLingui } from "@lingui/react";
import { editNumber, formatNumber } from "../../../shared/format/number";
import { toDb } from "../../../shared/history-file/cells";
import type { HistoryHead, HistoryMapping } from "../../../shared/schemas/history";
import { useLocale } from "../../lib/i18n";
import { CHANNEL_SYMBOL } from "./import-words";
import { type ReadLine, readFirstLines } from "./mapping";

const SHOWN = 6;

/** How the first lines are read by the mapping as it stands, while it is being made. */
export function FirstLines({ head, mapping }: { head: HistoryHead; mapping: HistoryMapping }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const valueText = (
    value: ReadLine["values"][number],
    unit: HistoryMapping["levels"][number]["unit"],
  ) => {
    switch (value) {
      case "missing":
        return i18n.t("missing");
      case "over":
        return i18n.t("over the range");
      case "under":
        return i18n.t("under the range");
      case "unreadable":
        return i18n.t("can’t be read");
      default:
        // As it is written, and as it will be stored.
        return unit === "dB" ? (
          formatNumber(value, 2, locale)
        ) : (
          <>
            {editNumber(value, locale)}
            <span className="beneath block">
              {i18n.t("{level} dB", { level: formatNumber(toDb(value, unit), 2, locale) })}
            </span>
          </>
        );
    }
  };
  return (
    <section
      className="table-scroll"
      // biome-ignore lint/a11y/noNoninteractiveTabindex: many columns are scrolled by the arrow keys
      tabIndex={0}
      aria-label={i18n.t("How the first lines are read")}
    >
      <table className="first-lines">
        <thead>
          <tr>
            <th scope="col">{i18n.t("Line")}</th>
            <th scope="col">{i18n.t("Time")}</th>
            {mapping.levels.map(({ column, channel, unit }) => (
              <th scope="col" key={column}>
                {CHANNEL_SYMBOL[channel]} <span className="unit">{unit}</span>
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {readFirstLines(head, mapping, SHOWN).map(({ line, time, values }) => (
            <tr key={line}>
              <th scope="row" className="mono">
                {line}
              </th>
              <td className="mono">{time ?? i18n.t("can’t be read")}</td>
              {values.map((value, index) => (
                <td className="mono" key={mapping.levels[index]!.column}>
                  {valueText(value, mapping.levels[index]!.unit)}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}
