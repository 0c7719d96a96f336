import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { EMPLOYER_DUTIES } from "../../../shared/rule-sets/employer-duties";
import type { WorkerView } from "../../../shared/schemas/worker";
import { Failed } from "../../components/failed";
import { TextLink } from "../../components/link";
import { MarginNote } from "../../components/page";
import { bearerWord, dutyWord } from "../../lib/employer-words";
import { paths } from "../../paths";
import { employerQueries } from "./employer-queries";

/** Of somebody who works here for another employer: who does what for them, as agreed or else as is usual. */
export function EmployerNote({ worker }: { worker: WorkerView }) {
  const { i18n } = useLingui();
  const name = worker.employerName?.trim() || null;
  const list = useQuery(employerQueries.at(worker.siteId));
  const found = list.data?.find((one) => one.kind === worker.employer && one.name === name);
  const duties = found?.agreed ?? found?.usual?.duties;
  const from = new URLSearchParams({
    site: worker.siteId,
    ...(name === null ? {} : { employer: `${worker.employer}:${name}` }),
  });
  return (
    <MarginNote title={i18n.t("Who does what")}>
      {list.isPending && <p className="loading-line" />}
      {list.isError && <Failed error={list.error} onRetry={() => void list.refetch()} />}
      {duties && (
        <dl className="margin-duties">
          {EMPLOYER_DUTIES.map((duty) => (
            <div key={duty}>
              <dt>{dutyWord(i18n, duty)}</dt>
              <dd>{bearerWord(i18n, duties[duty])}</dd>
            </div>
          ))}
        </dl>
      )}
      {found?.agreed && <p>{i18n.t("Agreed in: {basis}", { basis: found.agreed.basis })}</p>}
      {list.data && !found?.agreed && (
        <p>
          {found?.usual
            ? i18n.t("Not agreed; usual by {citation}.", { citation: found.usual.citation })
            : i18n.t("Not agreed, and nothing is known to be usual.")}
          {found?.usual?.sourceStatus === "from-memory" && ` (${i18n.t("from memory")})`}
        </p>
      )}
      <p>
        <TextLink to={`${paths.employers}?${from}`}>{i18n.t("Agencies and contractors")}</TextLink>
      </p>
    </MarginNote>
  );
}
