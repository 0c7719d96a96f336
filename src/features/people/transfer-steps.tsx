import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { formatDate, localDateOf } from "../../../shared/format/date";
import { isolate } from "../../../shared/i18n/isolate";
import { RecordReceiptInput, RecordTransferView } from "../../../shared/schemas/record-transfer";
import {
  DateField,
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { Status } from "../../components/status";
import { download } from "../../lib/download";
import { useLocale } from "../../lib/i18n";
import { type Decision, DecisionDialog } from "./decision-dialog";
import { useDecision } from "./retention-queries";
import { transferFileAddress, transferQueries, useReceiveTransfer } from "./transfer-queries";

/** What can be done with one: approve, take the file, record the receipt, withdraw. */
export function TransferSteps({
  transfer,
  timeZone,
}: {
  transfer: RecordTransferView;
  timeZone: string;
}) {
  const { i18n } = useLingui();
  const [asking, setAsking] = useState<Decision | null>(null);
  const [isSigning, setIsSigning] = useState(false);
  const { can, state, files } = transfer;
  if (isSigning)
    return (
      <ReceiptForm transfer={transfer} timeZone={timeZone} onDone={() => setIsSigning(false)} />
    );
  return (
    <>
      {state === "proposed" && !can.approve && (
        <span className="visitor-mail">{i18n.t("Somebody else approves.")}</span>
      )}
      <span className="transfer-steps">
        {can.approve && (
          <TextButton onClick={() => setAsking("approval")}>{i18n.t("Approve")}</TextButton>
        )}
        {can.take && <TakeFile transfer={transfer} />}
        {can.receive && files.length > 0 && (
          <TextButton onClick={() => setIsSigning(true)}>{i18n.t("Record the receipt")}</TextButton>
        )}
        {can.withdraw && (
          <TextButton onClick={() => setAsking("withdrawal")}>{i18n.t("Withdraw")}</TextButton>
        )}
      </span>
      <Decide transfer={transfer} asking={asking} onClose={() => setAsking(null)} />
    </>
  );
}

function Decide({
  transfer,
  asking,
  onClose,
}: {
  transfer: RecordTransferView;
  asking: Decision | null;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id, revision, siteName, successor, passesOn } = transfer;
  const decide = useDecision(`/record-transfers/${id}`, RecordTransferView, revision, onClose);
  const names = { site: isolate(siteName), successor: isolate(successor) };
  return (
    <DecisionDialog
      asking={asking}
      decide={decide}
      onClose={onClose}
      asks={{
        approval: {
          title: i18n.t("Hand the records of {site} over?", names),
          lead: i18n.t(
            "{successor} gets all records of {site} with names and numbers. The site passes on {date}. An officer then takes the file.",
            { ...names, date: formatDate(passesOn, locale) },
          ),
          act: i18n.t("Approve"),
        },
        withdrawal: {
          title: i18n.t("Withdraw the handing over?"),
          lead: i18n.t(
            "{successor} gets no more files. Files that went out stay where they are.",
            names,
          ),
          act: i18n.t("Withdraw"),
        },
      }}
    />
  );
}

/** A browser saves an error under the file's name: so it is asked first whether the file can still be taken. */
function TakeFile({ transfer }: { transfer: RecordTransferView }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const [said, setSaid] = useState("");
  const [error, setError] = useState<unknown>(null);
  async function take() {
    setSaid("");
    setError(null);
    try {
      const { rows } = await client.fetchQuery({ ...transferQueries.list, staleTime: 0 });
      if (!rows.find(({ id }) => id === transfer.id)?.can.take) return;
      download([transferFileAddress(transfer)]);
      setSaid(
        i18n.t("The browser is taking the file. It is listed here once it has gone out whole."),
      );
    } catch (refused) {
      setError(refused);
    }
  }
  return (
    <>
      <TextButton onClick={() => void take()}>
        {transfer.files.length === 0 ? i18n.t("Take the file") : i18n.t("Take the file again")}
      </TextButton>
      <Status>{said}</Status>
      {error !== null && <FormProblem error={error} />}
    </>
  );
}

function ReceiptForm({
  transfer,
  timeZone,
  onDone,
}: {
  transfer: RecordTransferView;
  timeZone: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const form = useSchemaForm(RecordReceiptInput, {
    defaultValues: {
      sha256: "",
      signedBy: "",
      signedOn: localDateOf(new Date().toISOString(), timeZone),
    },
    keepAs: `/record-transfers/${transfer.id}/receipt`,
  });
  const receive = useReceiveTransfer(transfer, onDone);
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Receipt of {successor}", { successor: transfer.successor })}
      onSubmit={form.handleSubmit((body) =>
        receive.start(body, { onError: showIssuesOn(form, i18n) }),
      )}
    >
      <TextAreaField
        form={form}
        name="sha256"
        rows={3}
        label={i18n.t("SHA-256 that the successor counted")}
        note={i18n.t("Over the file as they received it; the README in it says how.")}
      />
      <TextField form={form} name="signedBy" label={i18n.t("Signed by")} />
      <DateField form={form} name="signedOn" label={i18n.t("Signed on")} />
      <FormProblem error={receive.error} form={form} />
      <FormActions>
        <SubmitButton isBusy={receive.isPending}>{i18n.t("Record the receipt")}</SubmitButton>
        <TextButton onClick={onDone}>{i18n.t("Leave as it was")}</TextButton>
      </FormActions>
    </Form>
  );
}
