import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatDate } from "../../../shared/format/date";
import { Button } from "../../components/button";
import { useLocale } from "../../lib/i18n";
import { problemText } from "../../lib/problem-text";
import { useAcknowledgeOwn } from "./changes";
import { fitOfOwn, isOwnFault, ownFitSentence } from "./own-fit";
import type { OwnProtector } from "./own-protectors";
import { ownQueries } from "./queries";

/** Whether a protector fits its wearer, in one sentence. */
export function OwnFit({ workerId, protector }: { workerId: string; protector: OwnProtector }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { data } = useQuery(ownQueries.fits(workerId));
  if (!data) return <>&nbsp;</>;
  const test = fitOfOwn(data, protector);
  const sentence = ownFitSentence(i18n, locale, test);
  return isOwnFault(test) ? <b className="is-fault">{sentence}</b> : sentence;
}

/** Devices that were handed out and not said to be received yet, each with the one thing to do. */
export function AcknowledgeOwn({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const issues = useQuery(ownQueries.issues(workerId));
  const acknowledge = useAcknowledgeOwn(workerId);
  return (
    <>
      {issues.data
        ?.filter(({ can }) => can.acknowledge)
        .map((issue) => (
          <div key={issue.id} className="me-receipt">
            <p id={`receipt-${issue.id}`}>
              {i18n.t("You were given {protector} on {date}.", {
                protector: issue.modelName,
                date: formatDate(issue.issuedOn, locale),
              })}{" "}
              {issue.wasInstructed &&
                i18n.t("You were shown how to wear it. It costs you nothing.")}
            </p>
            <Button
              size="worker"
              aria-describedby={`receipt-${issue.id}`}
              isBusy={acknowledge.isPending && acknowledge.variables.id === issue.id}
              onClick={() => acknowledge.mutate(issue)}
            >
              {i18n.t("Yes, I have it")}
            </Button>
          </div>
        ))}
      <p className="me-note" role="status">
        {acknowledge.isSuccess && i18n.t("Thank you, that is noted.")}
      </p>
      {acknowledge.error && (
        <p className="field-error" role="alert">
          {problemText(i18n, acknowledge.error)}
        </p>
      )}
    </>
  );
}
