import { useLingui } from "@lingui/react";
import { formatInstant } from "../../../shared/format/date";
import type { UserView } from "../../../shared/schemas/user";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { grantWords } from "./role-words";

/** Who may sign in and as what; who no longer may stands beneath. */
export function PeopleTable({
  people,
  state,
  error,
  onRetry,
  timeZone,
  namesZone,
}: {
  people: readonly UserView[];
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
  timeZone: string;
  /** Where the reader's sites have several, a time says whose it is. */
  namesZone: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<UserView>[] = [
    {
      id: "name",
      head: i18n.t("Name"),
      isRowHead: true,
      sortValue: ({ name }) => name,
      cell: ({ id, name, email, expectedSubject }) => (
        <>
          <TextLink to={paths.person(id)}>{name}</TextLink>
          <span className="person-sign-in">{email ?? expectedSubject}</span>
        </>
      ),
    },
    {
      id: "sign-in",
      head: i18n.t("Signs in as"),
      cell: ({ email, expectedSubject }) =>
        email ?? expectedSubject ?? <span className="not-assessed">{i18n.t("with a code")}</span>,
      hidesOnPhone: true,
    },
    {
      id: "roles",
      head: i18n.t("Roles"),
      cell: ({ grants, revokedAt }) =>
        grants.length === 0 || revokedAt !== null ? (
          <span className="not-assessed">{i18n.t("none")}</span>
        ) : (
          <ul>
            {grants.map((grant) => (
              <li key={grant.id}>{grantWords(i18n, grant)}</li>
            ))}
          </ul>
        ),
    },
    {
      id: "worker",
      head: i18n.t("Worker"),
      cell: ({ workerName }) => workerName ?? "–",
      hidesOnPhone: true,
    },
    {
      id: "last",
      head: i18n.t("Last sign-in"),
      unit: namesZone ? timeZone : undefined,
      sortValue: ({ lastSignInAt }) => lastSignInAt,
      cell: ({ lastSignInAt, isBound }) =>
        lastSignInAt !== null
          ? formatInstant(lastSignInAt, timeZone, locale)
          : isBound
            ? "–"
            : i18n.t("not yet"),
      hidesOnPhone: true,
    },
  ];
  return (
    <DataTable
      caption={i18n.t("People")}
      columns={columns}
      rows={people}
      rowKey={({ id }) => id}
      state={state}
      error={error}
      onRetry={onRetry}
      groupOf={({ revokedAt }) =>
        revokedAt === null
          ? { key: "current", label: i18n.t("May sign in") }
          : { key: "ended", label: i18n.t("Access ended") }
      }
      empty={<Empty title={i18n.t("Nobody may sign in yet.")} />}
    />
  );
}
