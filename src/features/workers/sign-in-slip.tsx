import { useLingui } from "@lingui/react";
import { useEffect, useRef } from "react";
import type { z } from "zod";
import { formatDate, localDateOf } from "../../../shared/format/date";
import type { WorkerView } from "../../../shared/schemas/worker";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { useLocale } from "../../lib/i18n";
import { useIssueCode } from "./queries";

/** A code for a worker without e-mail, on paper: shown once, and nowhere again. */
export function SignInSlip({
  worker,
  timeZone,
  organizationName,
  issuedBy,
}: {
  worker: z.infer<typeof WorkerView>;
  timeZone: string;
  organizationName: string;
  issuedBy: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const issue = useIssueCode(worker.id);
  const place = useRef<HTMLDivElement>(null);
  // The slip takes the button's place and gives it back: the focus goes along.
  useEffect(() => {
    const at = place.current;
    if (!issue.data || !at) return;
    at.querySelector<HTMLElement>("[data-code]")?.focus();
    return () => at.querySelector<HTMLElement>("[data-make-code]")?.focus();
  }, [issue.data]);
  const today = localDateOf(new Date().toISOString(), timeZone);
  return (
    <div ref={place} className="contents">
      {!issue.data && (
        <p className="slip-offer">
          {worker.hasSignIn
            ? i18n.t("This worker signs in already; a new code binds another sign-in.")
            : i18n.t("A one-use code on paper binds a sign-in to this worker.")}{" "}
          <Button data-make-code isBusy={issue.isPending} onClick={() => issue.mutate()}>
            {i18n.t("Make a sign-in code")}
          </Button>
        </p>
      )}
      <FormProblem error={issue.error} />
      {issue.data && (
        <div className="slip">
          <div className="slip-head">
            <b>Dinward</b>
            <span>
              {i18n.t("{organization} · issued {date}", {
                organization: organizationName,
                date: formatDate(today, locale),
              })}
            </span>
          </div>
          <h3>{i18n.t("Your own noise record")}</h3>
          <dl className="slip-facts">
            <div>
              <dt>{i18n.t("Worker")}</dt>
              <dd>{worker.name}</dd>
            </div>
            <div>
              <dt>{i18n.t("Employee number")}</dt>
              <dd className="mono">{worker.employeeNumber}</dd>
            </div>
            <div>
              <dt>{i18n.t("Issued by")}</dt>
              <dd>{issuedBy}</dd>
            </div>
          </dl>
          <p className="slip-code mono" data-code tabIndex={-1}>
            {issue.data.code}
          </p>
          <ol className="slip-steps">
            <li>{i18n.t("Open {address} and sign in.", { address: window.location.origin })}</li>
            <li>{i18n.t("Type your employee number and this code.")}</li>
            <li>
              {i18n.t("The code works once, until {date}.", {
                date: formatDate(localDateOf(issue.data.expiresAt, timeZone), locale),
              })}
            </li>
          </ol>
          <p className="slip-actions no-print">
            <Button kind="primary" onClick={() => window.print()}>
              {i18n.t("Print the slip")}
            </Button>
            <Button onClick={() => issue.reset()}>{i18n.t("Put it away")}</Button>
          </p>
          <p className="field-note no-print">
            {i18n.t("It is shown here once. An older code of this worker no longer works.")}
          </p>
        </div>
      )}
    </div>
  );
}
