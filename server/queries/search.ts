import type { SearchView } from "../../shared/schemas/search";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { containsWords } from "../lib/search-words";
import { crewPolicy, programmePolicy, protectorPolicy, workerPolicy } from "../policies";

const most = 8;

/** The first of each kind whose name, or a worker's number, has every word of the text in it. */
export async function searchByName(actor: Actor, text: string): Promise<SearchView> {
  const find = <Row extends object>(
    columns: string,
    from: string,
    expression: string,
    isVisible: string,
    order: string,
  ) => {
    const { condition, values } = containsWords(expression, text);
    return rows<Row>(
      `SELECT ${columns} FROM ${from} WHERE ${isVisible} AND ${condition} ORDER BY ${order} LIMIT ${most}`,
      values,
    );
  };
  return {
    workers: await find(
      `w.id, w.name, w.employee_number AS "employeeNumber", s.name AS "siteName"`,
      "workers w JOIN sites s ON s.id = w.site_id",
      "(lower(w.name) || ' ' || lower(w.employee_number))",
      visible(workerPolicy, actor, "w"),
      "w.left_on IS NOT NULL, w.name, w.id",
    ),
    crews: await find(
      `c.id, c.name, s.name AS "siteName"`,
      "crews c JOIN sites s ON s.id = c.site_id",
      "lower(c.name)",
      `NOT c.is_archived AND ${visible(crewPolicy, actor, "c")}`,
      "c.name, c.id",
    ),
    tasks: await find(
      `t.id, t.name, s.name AS "siteName"`,
      "tasks t JOIN sites s ON s.id = t.site_id",
      "lower(t.name)",
      `NOT t.is_archived AND ${visible(programmePolicy, actor, "t")}`,
      "t.name, t.id",
    ),
    protectors: await find(
      "m.id, m.name, m.kind",
      "protector_models m",
      "lower(m.name)",
      `NOT m.is_archived AND ${visible(protectorPolicy, actor, "m")}`,
      "m.name, m.id",
    ),
  };
}
