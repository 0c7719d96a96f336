import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { EmployerShareView } from "../../../shared/schemas/employer-share";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Dialog } from "../../components/dialog";
import { Empty } from "../../components/empty";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { untilText } from "../../lib/until-text";
import { useEndShare } from "./queries";

/** Who of which employer reads results until when; what is over stands beneath. */
export function SharesTable({
  shares,
  state,
  error,
  onRetry,
}: {
  shares: readonly EmployerShareView[];
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const states = {
    expected: i18n.t("has not signed in"),
    here: i18n.t("has signed in"),
    over: i18n.t("over"),
  };
  const columns: DataColumn<EmployerShareView>[] = [
    {
      id: "name",
      head: i18n.t("Name"),
      isRowHead: true,
      cell: ({ name, email }) => (
        <>
          <bdi>{name}</bdi>
          <span className="visitor-mail">{email}</span>
        </>
      ),
    },
    {
      id: "employer",
      head: i18n.t("Employer"),
      cell: ({ employerName }) => <bdi>{employerName}</bdi>,
    },
    {
      id: "until",
      head: i18n.t("Until"),
      cell: ({ endsAt, timeZone }) => untilText(i18n, endsAt, timeZone, locale),
    },
    { id: "state", head: i18n.t("State"), cell: (share) => states[share.state] },
    { id: "by", head: i18n.t("Let in by"), cell: ({ grantedBy }) => grantedBy ?? "–" },
    {
      id: "end",
      head: <span className="sr-only">{i18n.t("What to do")}</span>,
      cell: (share) => (share.state === "over" ? null : <EndShare share={share} />),
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Who is let in")}
      columns={columns}
      rows={shares}
      rowKey={({ id }) => id}
      state={state}
      error={error}
      onRetry={onRetry}
      stacksOnPhone
      groupOf={(share) =>
        share.state === "over"
          ? { key: "over", label: i18n.t("Ended") }
          : { key: "current", label: i18n.t("May come in") }
      }
      empty={<Empty title={i18n.t("Nobody of an employer is let in.")} />}
    />
  );
}

/** Asks once, then ends it before its time. */
function EndShare({ share }: { share: EmployerShareView }) {
  const { i18n } = useLingui();
  const [isAsking, setIsAsking] = useState(false);
  const ending = useEndShare(share.id, () => setIsAsking(false));
  const close = () => {
    setIsAsking(false);
    ending.reset();
  };
  return (
    <>
      <TextButton onClick={() => setIsAsking(true)}>
        {i18n.t("End")}
        <span className="sr-only"> {share.name}</span>
      </TextButton>
      <Dialog
        isOpen={isAsking}
        onClose={close}
        title={i18n.t("End the access of {name} now?", { name: share.name })}
        lead={i18n.t("It ends at their next click. Files they have taken stay with them.")}
        actions={
          <>
            <Button kind="primary" isBusy={ending.isPending} onClick={ending.start}>
              {i18n.t("End access")}
            </Button>
            <Button onClick={close}>{i18n.t("Leave as it was")}</Button>
          </>
        }
      >
        {ending.isError && <FormProblem error={ending.error} />}
      </Dialog>
    </>
  );
}
