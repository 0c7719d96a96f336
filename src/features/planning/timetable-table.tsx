import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatDose } from "../../../shared/format/dose";
import { formatLevel } from "../../../shared/format/level";
import { isolate } from "../../../shared/i18n/isolate";
import { REST, SLOT_MIN, stretchesOf } from "../../../shared/planning/timetable";
import type { KeptTimetable } from "../../../shared/schemas/timetable";
import { useLocale } from "../../lib/i18n";
import { restWord, slotTime, taskSign } from "./timetable-words";

const SLOTS_AN_HOUR = 60 / SLOT_MIN;

/** Who is where when: a row a person, a bracket a stretch, with each task's sign; beneath it the same as a list. */
export function TimetableTable({ request, basis, found }: KeptTimetable) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const nameOf = (task: number) =>
    task === REST ? restWord(i18n, locale, basis.rest) : basis.tasks[task]!.name;
  const hours = Array.from({ length: Math.ceil(request.slots / SLOTS_AN_HOUR) }, (_, hour) => ({
    at: slotTime(request.startsAt, hour * SLOTS_AN_HOUR),
    slots: Math.min(SLOTS_AN_HOUR, request.slots - hour * SLOTS_AN_HOUR),
  }));
  return (
    <>
      <dl className="timetable-signs">
        {basis.tasks.map(({ id, name, levelDb, levelFrom, isUpper }, task) => (
          <div key={id}>
            <dt>{taskSign(task)}</dt>
            <dd>
              {name}{" "}
              <span className="beneath">
                {levelFrom === null
                  ? i18n.t("{level} dB", { level: formatLevel(levelDb, locale) })
                  : i18n.t("{level} dB since {date}", {
                      level: formatLevel(levelDb, locale),
                      date: formatShortDate(levelFrom, locale),
                    })}
                {isUpper && `; ${i18n.t("dose an upper bound")}`}
              </span>
            </dd>
          </div>
        ))}
        <div>
          <dt>·</dt>
          <dd>{restWord(i18n, locale, basis.rest)}</dd>
        </div>
      </dl>
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls has to be reached by keyboard */}
      <section className="timetable-scroll" tabIndex={0} aria-label={i18n.t("Timetable")}>
        <table className="timetable">
          <caption className="sr-only">{i18n.t("Who is where when")}</caption>
          <thead>
            <tr>
              <th scope="col">{i18n.t("Worker")}</th>
              {hours.map(({ at, slots }) => (
                <th key={at} scope="col" colSpan={slots} className="mono">
                  {at}
                </th>
              ))}
              <th scope="col" className="is-figure">
                {i18n.t("Of the limit")}
              </th>
            </tr>
          </thead>
          <tbody>
            {basis.people.map(({ id, name }, person) => (
              <tr key={id}>
                <th scope="row">{isolate(name)}</th>
                {stretchesOf(found.table[person]!).map(({ task, from, to }) => (
                  <td key={from} colSpan={to - from} className={task === REST ? "is-rest" : ""}>
                    <span aria-hidden="true">{task === REST ? "·" : taskSign(task)}</span>
                    <span className="sr-only">
                      {i18n.t("{from} to {to}: {task}", {
                        from: slotTime(request.startsAt, from),
                        to: slotTime(request.startsAt, to),
                        task: nameOf(task),
                      })}
                    </span>
                  </td>
                ))}
                <td className="is-figure mono">{formatDose(found.sharesPct[person]!, locale)}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </section>
    </>
  );
}

/** The same for the shop floor: a paragraph a person, in full words. */
export function TimetableSheet({ request, basis, found }: KeptTimetable) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <ul className="timetable-sheet">
      {basis.people.map(({ id, name, employeeNumber }, person) => (
        <li key={id}>
          <h3>
            {isolate(name)} <span className="beneath">{employeeNumber}</span>
          </h3>
          <ol>
            {stretchesOf(found.table[person]!).map(({ task, from, to }) => (
              <li key={from}>
                <span className="mono">
                  {slotTime(request.startsAt, from)}–{slotTime(request.startsAt, to)}
                </span>{" "}
                {task === REST ? restWord(i18n, locale, basis.rest) : basis.tasks[task]!.name}
              </li>
            ))}
          </ol>
        </li>
      ))}
    </ul>
  );
}
