import type { TrainingInput } from "../../shared/schemas/training";
import { dateIssues, todayAt } from "../lib/calendar";
import { issue, unprocessable } from "../lib/errors";
import { workersByNumber } from "../queries/training";

/**
 * The workers whose numbers were given; a number given twice counts once.
 *
 * @throws AppError 422 where the date lies ahead, or a number is nobody's at the site.
 */
export async function checkTraining(
  site: { id: string; timeZone: string },
  { heldOn, employeeNumbers }: TrainingInput,
): Promise<string[]> {
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["heldOn"], heldOn);
  if (heldOn > today) issues.push(issue(["heldOn"], "in-the-future", { today }));
  const numbers = [...new Set(employeeNumbers)];
  const found = await workersByNumber(site.id, numbers);
  const known = new Set(found.map(({ employeeNumber }) => employeeNumber));
  const unknown = numbers.filter((number) => !known.has(number));
  if (unknown.length > 0)
    issues.push(
      issue(["employeeNumbers"], "employee-numbers-unknown", {
        numbers: unknown.slice(0, 10).join(", "),
        count: unknown.length,
      }),
    );
  if (issues.length > 0) throw unprocessable(issues);
  return found.map(({ id }) => id);
}
