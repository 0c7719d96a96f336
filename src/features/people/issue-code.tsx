import { useLingui } from "@lingui/react";
import { formatInstant } from "../../../shared/format/date";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { useLocale } from "../../lib/i18n";
import { useIssueCode } from "./queries";

/** A code on paper that binds a worker's sign-in; it is shown once and works once. */
export function IssueCode({ workerId, timeZone }: { workerId: string; timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const issue = useIssueCode(workerId);
  return (
    <>
      <p>
        {i18n.t("For somebody without an e-mail: a code on paper, typed once after signing in.")}
      </p>
      <p>
        <Button isBusy={issue.isPending} onClick={() => issue.mutate()}>
          {i18n.t("Issue a code")}
        </Button>
      </p>
      <div role="status">
        {issue.data && (
          <>
            <p className="issued-code">{issue.data.code}</p>
            <p>
              {i18n.t(
                "Write it down or print it now: it is not shown again. It works until {time}.",
                {
                  time: formatInstant(issue.data.expiresAt, timeZone, locale),
                },
              )}
            </p>
          </>
        )}
      </div>
      {issue.isError && <FormProblem error={issue.error} />}
    </>
  );
}
