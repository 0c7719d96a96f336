import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatDate, formatInstant, localDateOf } from "../../../shared/format/date";
import type { TokenView } from "../../../shared/schemas/api-token";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { tokenQueries, useEndToken } from "./queries";
import { scopeWord, tokenStateWord } from "./token-words";

function EndToken({ token }: { token: TokenView }) {
  const { i18n } = useLingui();
  const end = useEndToken(token.id);
  return (
    <>
      <TextButton onClick={end.start}>
        {i18n.t("End")}
        <span className="sr-only"> {token.name}</span>
      </TextButton>
      {end.isError && <FormProblem error={end.error} />}
    </>
  );
}

/** Tokens of one person, those that work first. */
export function TokensTable({ userId, timeZone }: { userId: string; timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const tokens = useQuery(tokenQueries.ofUser(userId));
  const opens = ({ scopes }: TokenView) => scopes.map((scope) => scopeWord(i18n, scope)).join(", ");
  const columns: DataColumn<TokenView>[] = [
    {
      id: "name",
      head: i18n.t("Name"),
      isRowHead: true,
      cell: (token) => (
        <>
          <bdi>{token.name}</bdi>
          <span className="access-sees">{opens(token)}</span>
        </>
      ),
    },
    { id: "opens", head: i18n.t("Opens"), cell: opens, hidesOnPhone: true },
    {
      id: "used",
      head: i18n.t("Last used"),
      unit: timeZone,
      cell: ({ lastUsedAt }) =>
        lastUsedAt === null ? i18n.t("never") : formatInstant(lastUsedAt, timeZone, locale),
      hidesOnPhone: true,
    },
    {
      id: "state",
      head: i18n.t("State"),
      cell: ({ state, expiresAt }) =>
        state === "works"
          ? i18n.t("works until {day}", {
              day: formatDate(localDateOf(expiresAt, timeZone), locale),
            })
          : tokenStateWord(i18n, state),
    },
    {
      id: "end",
      head: <span className="sr-only">{i18n.t("What to do")}</span>,
      cell: (token) => (token.state === "works" ? <EndToken token={token} /> : null),
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Tokens for other systems")}
      columns={columns}
      rows={tokens.data ?? []}
      rowKey={({ id }) => id}
      state={tokens.isPending ? "loading" : tokens.isError ? "failed" : "ready"}
      error={tokens.error}
      onRetry={() => void tokens.refetch()}
      empty={<Empty title={i18n.t("There is no token.")} />}
    />
  );
}
