import { literal, type Model, type ModelStatic, Op, type WhereOptions } from "sequelize";
import { forbidden, notFound } from "./errors";

export const ROLES = [
  "officer",
  "supervisor",
  "worker",
  "auditor",
  "administrator",
  "representative",
] as const;
export type Role = (typeof ROLES)[number];

const uuid = /^[0-9a-f-]{36}$/;

/** A role in force. Without a site it holds for all sites of the organization; with a year it is a visitor's. */
export interface Grant {
  readonly role: Role;
  readonly siteId: string | null;
  /** An auditor's grant may be about the records of one year at its site, and of nothing else. */
  readonly year?: number | null;
}

/** Somebody of an outside employer, who reads its people's results at one site. */
export interface EmployerGrant {
  readonly id: string;
  readonly siteId: string;
}

const isWhole = ({ year }: Grant): boolean => (year ?? null) === null;

/**
 * Who asks: a sign-in with its grants. A visitor's grant is no role: it opens what a policy or a gate opens to visits, and
 * nothing else.
 */
export class Actor {
  /** Whole roles. */
  readonly grants: readonly Grant[];
  /** One year of one site each. */
  readonly visits: readonly { readonly siteId: string; readonly year: number }[];

  constructor(
    readonly userId: string,
    readonly organizationId: string,
    readonly name: string,
    readonly email: string | null,
    readonly language: string,
    readonly workerId: string | null,
    grants: readonly Grant[],
    /** No roles either: they open what a policy names with `sharedWith`. */
    readonly employerGrants: readonly EmployerGrant[] = [],
  ) {
    const granted = employerGrants.flatMap(({ id, siteId }) => [id, siteId]);
    for (const id of [
      userId,
      organizationId,
      workerId,
      ...grants.map(({ siteId }) => siteId),
      ...granted,
    ]) {
      if (id !== null && !uuid.test(id)) throw new Error("an actor's ids are uuids");
    }
    this.grants = grants.filter(isWhole);
    this.visits = grants.flatMap(({ role, siteId, year }) =>
      role === "auditor" && siteId !== null && Number.isInteger(year)
        ? [{ siteId, year: Number(year) }]
        : [],
    );
  }

  is(...roles: Role[]): boolean {
    return this.grants.some(({ role }) => roles.includes(role));
  }

  isAt(siteId: string, ...roles: Role[]): boolean {
    return this.grants.some(
      (grant) => roles.includes(grant.role) && (grant.siteId === null || grant.siteId === siteId),
    );
  }

  /** SQL: the row's site is one for which this actor holds one of the roles; false where there is none. */
  at(siteColumn: string, ...roles: Role[]): string | false {
    const held = this.grants.filter(({ role }) => roles.includes(role));
    if (held.length === 0) return false;
    if (held.some(({ siteId }) => siteId === null)) return "TRUE";
    return `${siteColumn} IN (${held.map(({ siteId }) => `'${siteId}'`).join(", ")})`;
  }

  get isVisitor(): boolean {
    return this.visits.length > 0;
  }

  get isOfEmployer(): boolean {
    return this.employerGrants.length > 0;
  }

  /**
   * SQL: the row is a day at the site of one of this actor's employer grants, on which the worker worked there for that
   * employer. The grant itself is asked for its employer: a name that somebody typed never stands in a condition.
   */
  sharedWith(day: string): string | false {
    const ids = this.employerGrants.map(({ id }) => `'${id}'`).join(", ");
    return (
      this.isOfEmployer &&
      `${day}.worker_id IN (SELECT p.worker_id FROM worker_employers p JOIN role_grants pg ON pg.employer_kind = p.employer AND pg.employer_name = p.employer_name
        WHERE pg.id IN (${ids})) AND EXISTS (SELECT 1 FROM role_grants eg JOIN workers ew ON ew.id = ${day}.worker_id
        JOIN LATERAL (SELECT x.employer, x.employer_name FROM worker_employers x WHERE x.worker_id = ew.id AND x.since <= ${day}.date
          ORDER BY x.since DESC, x.number DESC LIMIT 1) ee ON ee.employer = eg.employer_kind AND ee.employer_name = eg.employer_name
        WHERE eg.id IN (${ids}) AND eg.revoked_at IS NULL AND eg.ends_at > now()
          AND eg.site_id = ${day}.site_id AND ${day}.date >= ew.hired_on AND (ew.left_on IS NULL OR ${day}.date <= ew.left_on))`
    );
  }

  /** One of the roles at a site, or a visit there in that year. */
  mayReadYear(siteId: string, year: number, ...roles: Role[]): boolean {
    return (
      this.isAt(siteId, ...roles) ||
      this.visits.some((visit) => visit.siteId === siteId && visit.year === year)
    );
  }

  /** SQL: the row belongs to a site and a year that this actor visits, by its first and last date. */
  visiting(siteColumn: string, firstDate: string, lastDate = firstDate): string | false {
    return (
      this.isVisitor &&
      this.visits
        .map(
          ({ siteId, year }) =>
            `(${siteColumn} = '${siteId}' AND ${firstDate} < '${year + 1}-01-01' AND ${lastDate} >= '${year}-01-01')`,
        )
        .join(" OR ")
    );
  }

  /** SQL: a worker has a day at a site and in a year that this actor visits. */
  visitingWorker(workerColumn: string): string | false {
    return (
      this.isVisitor &&
      `EXISTS (SELECT 1 FROM days v WHERE v.worker_id = ${workerColumn} AND (${this.visiting("v.site_id", "v.date")}))`
    );
  }

  /** SQL: a site that this actor visits. */
  visitingSite(siteColumn: string): string | false {
    return (
      this.isVisitor &&
      `${siteColumn} IN (${this.visits.map(({ siteId }) => `'${siteId}'`).join(", ")})`
    );
  }

  /** SQL: a worker is in one of this supervisor's crews on a date, by the memberships of that date. */
  supervises(workerColumn: string, dateExpression: string): string | false {
    if (!this.is("supervisor")) return false;
    return `EXISTS (SELECT 1 FROM crew_memberships m JOIN crew_supervisors s ON s.crew_id = m.crew_id
      WHERE m.worker_id = ${workerColumn} AND m.valid @> ${dateExpression} AND s.valid @> ${dateExpression} AND s.user_id = '${this.userId}')`;
  }

  /** SQL: the row is this worker's own. */
  owns(workerColumn: string): string | false {
    return this.is("worker") && this.workerId !== null && `${workerColumn} = '${this.workerId}'`;
  }
}

type Condition = string | false | null | undefined;

export interface Policy<Action extends string, Row> {
  /** SQL conditions on the row's alias, each a whole grant; the actor sees what any of them lets through. */
  readonly sees: (actor: Actor, alias: string) => readonly Condition[];
  readonly can: Readonly<Record<Action, (actor: Actor, row: Row) => boolean>>;
}

export function policy<Row>() {
  return <Action extends string>(definition: Policy<Action, Row>): Policy<Action, Row> =>
    definition;
}

/** SQL that is true for the rows this actor may see. No grant, no rows. */
export function visible<A extends string, R>(
  of: Policy<A, R>,
  actor: Actor,
  alias: string,
): string {
  const grants = of
    .sees(actor, alias)
    .filter((condition): condition is string => Boolean(condition));
  return grants.length === 0 ? "FALSE" : `(${grants.map((grant) => `(${grant})`).join(" OR ")})`;
}

/**
 * The row, if it is this actor's to see.
 *
 * @throws AppError not-found: not there, not of this organization, or not theirs to know of.
 */
export async function findVisible<Found extends Model, A extends string, R>(
  model: ModelStatic<Found>,
  of: Policy<A, R>,
  id: string,
  actor: Actor,
  options: { lock?: boolean } = {},
): Promise<Found> {
  const condition = visible(of, actor, `"${model.name}"`);
  const where = {
    id,
    organizationId: actor.organizationId,
    [Op.and]: [literal(condition)],
  } as WhereOptions;
  const found = await model.findOne({ where, lock: options.lock });
  if (!found) throw notFound();
  return found;
}

/** @throws AppError forbidden: seen, but not theirs to do. */
export function authorize<A extends string, R>(
  of: Policy<A, R>,
  actor: Actor,
  action: A,
  row: R,
): void {
  if (!of.can[action](actor, row)) throw forbidden();
}

/** What the actor may do with a row, sent beside its fields. */
export function abilities<A extends string, R>(
  of: Policy<A, R>,
  actor: Actor,
  row: R,
): Record<A, boolean> {
  return Object.fromEntries(
    Object.entries(of.can).map(([action, may]) => [
      action,
      (may as (actor: Actor, row: R) => boolean)(actor, row),
    ]),
  ) as Record<A, boolean>;
}
