import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel, formatLimit } from "../../../shared/format/level";
import type { AtEarView, NominalDayAtEar } from "../../../shared/schemas/at-ear";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import { whichCounts } from "./active-in-noise";

type Locale = ReturnType<typeof useLocale>;

/** How many of the worn minutes the battery is alive and dead; null where it is not stated. */
export function batteryOf(batteryMin: number | null, wornMin: number) {
  if (batteryMin === null) return null;
  const aliveMin = Math.min(batteryMin, wornMin);
  return { aliveMin, deadMin: wornMin - aliveMin };
}

function batteryWords(i18n: I18n, locale: Locale, batteryMin: number | null, wornMin: number) {
  const battery = batteryOf(batteryMin, wornMin);
  if (!battery) return <span className="not-assessed">{i18n.t("battery not stated")}</span>;
  const alive = formatDuration(battery.aliveMin, locale);
  return battery.deadMin === 0
    ? i18n.t("{alive} alive, to the end", { alive })
    : i18n.t("{alive} alive, {dead} dead", {
        alive,
        dead: formatDuration(battery.deadMin, locale),
      });
}

function audioWhy(i18n: I18n, day: NominalDayAtEar): string {
  switch (day.audioReason) {
    case "past-limit":
      return i18n.t("none: the day is past it already");
    case "not-worn":
      return i18n.t("it need not be worn in this day");
    case "no-limit":
      return i18n.t("the rule set states no limit at the ear");
    default:
      return i18n.t("Not assessed: the day’s level is open");
  }
}

/** The nominal days in which the task is done: at the ear off, on and as worked, and how loud a programme may be. */
export function NominalDays({ view }: { view: AtEarView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const active = view.outer === null ? view.inner.active : null;
  const level = (db: number | null, bound: NominalDayAtEar["atEarBound"]) =>
    db === null ? (
      <span className="not-assessed is-text">{i18n.t("Not assessed")}</span>
    ) : (
      formatLevel(db, locale, bound)
    );
  const columns: DataColumn<NominalDayAtEar>[] = [
    {
      id: "job",
      head: i18n.t("Job"),
      isRowHead: true,
      cell: ({ jobName }) => jobName,
    },
    {
      id: "worn",
      head: i18n.t("Worn"),
      cell: ({ wornMin, lengthMin }) =>
        i18n.t("{worn} of {length}", {
          worn: formatDuration(wornMin, locale),
          length: formatDuration(lengthMin, locale),
        }),
    },
    ...(active
      ? [
          {
            id: "battery",
            head: i18n.t("Battery"),
            cell: ({ wornMin }: NominalDayAtEar) =>
              batteryWords(i18n, locale, active.batteryMin, wornMin),
          },
        ]
      : []),
    {
      id: "off",
      head: active ? i18n.t("Part off") : i18n.t("Day at the ear"),
      unit: "dB",
      kind: "figure",
      cell: ({ atEarDb, atEarBound }) => level(atEarDb, atEarBound),
    },
    ...(active
      ? [
          {
            id: "on",
            head: i18n.t("Part on"),
            unit: "dB",
            kind: "figure" as const,
            cell: ({ atEarActiveDb, atEarBound }: NominalDayAtEar) =>
              level(atEarActiveDb, atEarBound),
          },
          {
            id: "worked",
            head: i18n.t("As worked"),
            unit: "dB",
            kind: "figure" as const,
            cell: ({ atEarAsWorkedDb, atEarBound }: NominalDayAtEar) =>
              level(atEarAsWorkedDb, atEarBound),
          },
        ]
      : []),
    {
      id: "audio",
      head: i18n.t("Programme up to"),
      unit: "dB(A)",
      kind: "figure",
      cell: (day) =>
        day.mostAudioDb === null ? (
          <span className="not-assessed is-text">{audioWhy(i18n, day)}</span>
        ) : (
          formatLevel(day.mostAudioDb, locale)
        ),
    },
  ];
  return (
    <>
      <DataTable<NominalDayAtEar>
        caption={i18n.t("Nominal days with this protector")}
        rows={view.days}
        rowKey={({ jobId }) => jobId}
        stacksOnPhone
        columns={columns}
        empty={
          <Empty title={i18n.t("No nominal day has this task.")}>
            {i18n.t("A job’s nominal day says what else is done, and for how long.")}
          </Empty>
        }
      />
      {view.days.length > 0 && (
        <p className="picture-legend">
          {view.limit &&
            (view.limit.kind === "limit"
              ? i18n.t(
                  "Worn throughout wherever a protector counts as worn. Programme up to: the level under the cup for all that time at which the day reaches the limit of {limit} dB.",
                  { limit: formatLimit(view.limit.levelDb, locale) },
                )
              : i18n.t(
                  "Worn throughout wherever a protector counts as worn. Programme up to: the level under the cup for all that time at which the day reaches {limit} dB, to which a protector has to bring it down.",
                  { limit: formatLimit(view.limit.levelDb, locale) },
                ))}
          {active && ` ${whichCounts(i18n, view)}`}
        </p>
      )}
    </>
  );
}
