import { stringify } from "csv-stringify/sync";
import { guardFormula } from "../../shared/format/csv";
import { clockAt, REST, SLOT_MIN, stretchesOf } from "../../shared/planning/timetable";
import type { KeptTimetable } from "../../shared/schemas/timetable";

/** Who goes where when: a record for each stretch at one task, in the order of people and time. */
export function timetableCsv({ request, basis, found }: KeptTimetable): string {
  const records = found.table.flatMap((row, person) =>
    stretchesOf(row).map(({ task, from, to }) => [
      basis.people[person]!.employeeNumber,
      guardFormula(basis.people[person]!.name),
      clockAt(request.startsAt, from * SLOT_MIN),
      clockAt(request.startsAt, to * SLOT_MIN),
      (to - from) * SLOT_MIN,
      guardFormula(task === REST ? (basis.rest.name ?? "") : basis.tasks[task]!.name),
      task === REST ? basis.rest.levelDb : basis.tasks[task]!.levelDb,
      found.sharesPct[person]!,
    ]),
  );
  return stringify(
    [
      [
        "employee_number",
        "worker",
        "from",
        "to",
        "minutes",
        "task",
        "level_db",
        "day_share_of_limit_pct",
      ],
      ...records,
    ],
    { record_delimiter: "\r\n" },
  );
}
