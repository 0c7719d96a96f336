import { useLingui } from "@lingui/react";
import { KNOWN_OVER_MARKS, KNOWN_UNDER_MARKS } from "../../../shared/history-file/cells";
import type { HistoryHead } from "../../../shared/schemas/history";
import { DateInput } from "../../components/date-input";
import { Field } from "../../components/form";
import { NumberInput } from "../../components/number-input";
import { CHANNEL_SYMBOL, dateOrderText, roleText } from "./import-words";
import { type ColumnRole, columnCount, type MappingDraft, needsStart, type Unit } from "./mapping";

const ROLES: readonly ColumnRole[] = [
  "",
  "date-time",
  "date",
  "time",
  "elapsed",
  "laeq",
  "las",
  "las-max",
  "laf-max",
  "lceq",
  "lcpeak",
  "lzpeak",
];
const UNITS: readonly Unit[] = ["dB", "dB/10", "Pa"];
/** Values of a column that are shown beside it. */
const EXAMPLES = 3;

/** What each column of the file is, and how its times and numbers are written. */
export function MappingForm({
  head,
  draft,
  onChange,
}: {
  head: HistoryHead;
  draft: MappingDraft;
  onChange: (draft: MappingDraft) => void;
}) {
  const { i18n } = useLingui();
  const put = (part: Partial<MappingDraft>) => onChange({ ...draft, ...part });
  const skip = draft.skipLines ?? 0;
  const heads = head.lines[skip - 1] ?? [];
  const values = head.lines.slice(skip, skip + EXAMPLES);
  const setAt = <T,>(list: readonly T[], index: number, value: T) =>
    list.map((old, at) => (at === index ? value : old));
  return (
    <>
      <table className="mapping-columns">
        <caption className="sr-only">{i18n.t("Columns of the file")}</caption>
        <thead>
          <tr>
            <th scope="col">{i18n.t("Column")}</th>
            <th scope="col">{i18n.t("First values")}</th>
            <th scope="col">{i18n.t("What it is")}</th>
            <th scope="col">{i18n.t("Unit")}</th>
          </tr>
        </thead>
        <tbody>
          {Array.from({ length: columnCount(head) }, (_, column) => {
            const role = draft.roles[column] ?? "";
            const name = heads[column] || i18n.t("Column {number}", { number: column + 1 });
            return (
              // biome-ignore lint/suspicious/noArrayIndexKey: a column is its place
              <tr key={column} className={role === "" ? "is-left-alone" : undefined}>
                <th scope="row">{name}</th>
                <td className="mono">
                  {values
                    .map((row) => row[column] ?? "")
                    .filter((cell) => cell !== "")
                    .join(" · ")}
                </td>
                <td>
                  <select
                    className="input"
                    aria-label={i18n.t("What {column} is", { column: name })}
                    value={role}
                    onChange={(event) =>
                      put({ roles: setAt(draft.roles, column, event.target.value as ColumnRole) })
                    }
                  >
                    {ROLES.map((one) => (
                      <option key={one} value={one}>
                        {roleText(i18n, one)}
                      </option>
                    ))}
                  </select>
                </td>
                <td>
                  {role in CHANNEL_SYMBOL && (
                    <select
                      className="input"
                      aria-label={i18n.t("Unit of {column}", { column: name })}
                      value={draft.units[column]}
                      onChange={(event) =>
                        put({ units: setAt(draft.units, column, event.target.value as Unit) })
                      }
                    >
                      {UNITS.map((unit) => (
                        <option key={unit} value={unit}>
                          {unit}
                        </option>
                      ))}
                    </select>
                  )}
                  {role === "elapsed" && (
                    <select
                      className="input"
                      aria-label={i18n.t("Unit of {column}", { column: name })}
                      value={draft.elapsedUnit}
                      onChange={(event) =>
                        put({ elapsedUnit: event.target.value as MappingDraft["elapsedUnit"] })
                      }
                    >
                      {(["s", "ms", "hh:mm:ss"] as const).map((unit) => (
                        <option key={unit} value={unit}>
                          {unit}
                        </option>
                      ))}
                    </select>
                  )}
                </td>
              </tr>
            );
          })}
        </tbody>
      </table>
      <div className="form mapping-rest">
        {head.sheets.length > 1 && (
          <Field label={i18n.t("Sheet")} error={undefined}>
            {({ readOnly: _, ...wires }) => (
              <select
                className="input"
                {...wires}
                value={draft.sheet ?? head.sheets[0]}
                onChange={(event) => put({ sheet: event.target.value })}
              >
                {head.sheets.map((sheet) => (
                  <option key={sheet}>{sheet}</option>
                ))}
              </select>
            )}
          </Field>
        )}
        <Field
          label={i18n.t("Lines before the values")}
          note={i18n.t("The head line among them.")}
          error={undefined}
        >
          {(wires) => (
            <NumberInput
              {...wires}
              value={draft.skipLines}
              onValue={(value) =>
                put({
                  skipLines:
                    typeof value === "number" && Number.isInteger(value) && value >= 0
                      ? value
                      : null,
                })
              }
            />
          )}
        </Field>
        {head.format === "text" && (
          <Field label={i18n.t("Decimal mark")} isGroup error={undefined}>
            {() => (
              <Radios
                name="decimal"
                value={draft.decimal}
                choices={[
                  [".", i18n.t("Point, 84.3")],
                  [",", i18n.t("Comma, 84,3")],
                ]}
                onChange={(decimal) => put({ decimal })}
              />
            )}
          </Field>
        )}
        <Field label={i18n.t("Order of a date")} isGroup error={undefined}>
          {() => (
            <Radios
              name="date-order"
              value={draft.dateOrder}
              choices={(["ymd", "dmy", "mdy"] as const).map((order) => [
                order,
                dateOrderText(i18n, order),
              ])}
              onChange={(dateOrder) => put({ dateOrder })}
            />
          )}
        </Field>
        <Field label={i18n.t("The file’s clock")} isGroup error={undefined}>
          {() => (
            <Radios
              name="clock"
              value={draft.clock}
              choices={[
                ["site", i18n.t("the site’s own time")],
                ["utc", i18n.t("UTC")],
              ]}
              onChange={(clock) => put({ clock })}
            />
          )}
        </Field>
        {needsStart(draft) && (
          <>
            <Field label={i18n.t("Begins on")} error={undefined}>
              {(wires) => (
                <DateInput
                  {...wires}
                  value={draft.startDate ?? ""}
                  onChoose={(startDate) => put({ startDate })}
                />
              )}
            </Field>
            <Field label={i18n.t("Begins at")} note={i18n.t("06:00 or 06:00:00")} error={undefined}>
              {(wires) => (
                <input
                  {...wires}
                  className="input is-time"
                  value={draft.startTime}
                  onChange={(event) => put({ startTime: event.target.value.trim() })}
                />
              )}
            </Field>
          </>
        )}
        <Field
          label={i18n.t("Marks over the range")}
          isOptional
          note={i18n.t(
            "As they stand in the file, with a space between them. Known are {marks}, and what begins with “{sign}”.",
            { marks: KNOWN_OVER_MARKS.join(", "), sign: ">" },
          )}
          error={undefined}
        >
          {(wires) => (
            <input
              {...wires}
              className="input"
              value={draft.overRange}
              onChange={(event) => put({ overRange: event.target.value })}
            />
          )}
        </Field>
        <Field
          label={i18n.t("Marks under the range")}
          isOptional
          note={i18n.t("Known are {marks}, and what begins with “{sign}”.", {
            marks: KNOWN_UNDER_MARKS.join(", "),
            sign: "<",
          })}
          error={undefined}
        >
          {(wires) => (
            <input
              {...wires}
              className="input"
              value={draft.underRange}
              onChange={(event) => put({ underRange: event.target.value })}
            />
          )}
        </Field>
      </div>
    </>
  );
}

function Radios<Value extends string>({
  name,
  value,
  choices,
  onChange,
}: {
  name: string;
  value: Value;
  choices: readonly (readonly [Value, string])[];
  onChange: (value: Value) => void;
}) {
  return choices.map(([one, label]) => (
    <label key={one} className="choice">
      <input type="radio" name={name} checked={one === value} onChange={() => onChange(one)} />
      <span>{label}</span>
    </label>
  ));
}
