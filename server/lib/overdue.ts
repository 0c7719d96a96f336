import { LATE_STATES } from "../../shared/findings/overdue";

/** SQL: what is overdue can go up to the person `alias`, a row of users. */
export const canBeToldOfOverdue = (alias: string): string =>
  `(${alias}.revoked_at IS NULL AND ${alias}.email IS NOT NULL)`;

/** SQL: somebody still has to act on the row `alias` of findings. */
export const canBeLate = (alias: string): string =>
  `${alias}.state IN (${LATE_STATES.map((state) => `'${state}'`).join(", ")})`;

/** `isOverdue` of shared/findings in SQL: of the row `alias` of findings, on the site's date `today`. */
export const isOverdueFinding = (alias: string, today: string): string =>
  `(${alias}.due_on < ${today} AND ${canBeLate(alias)})`;
