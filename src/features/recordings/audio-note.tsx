import { useLingui } from "@lingui/react";
import { useState } from "react";
import { formatDate } from "../../../shared/format/date";
import { RecordingKeep, type RecordingView } from "../../../shared/schemas/recording";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import {
  DateField,
  Form,
  FormActions,
  SubmitButton,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { apiAddress } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useDeleteAudio, useKeepAudio } from "./queries";
import { showRecordingIssuesOn } from "./recording-issues";

/** Where a recording's sound is: gone, on its way, or kept, with why and until when. */
export function AudioNote({ view, onKeep }: { view: RecordingView; onKeep: () => void }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [isDeleting, setDeleting] = useState(false);
  if (view.fileId === null) return <p>{i18n.t("It has been discarded.")}</p>;
  const { keepReason, deleteOn, can } = view;
  return (
    <>
      {deleteOn !== null ? (
        <>
          <p>{i18n.t("Kept until {date}.", { date: formatDate(deleteOn, locale) })}</p>
          <p>{keepReason}</p>
        </>
      ) : (
        <p>{i18n.t("It goes as soon as it is analysed.")}</p>
      )}
      {can.change && (
        <ul className="margin-actions">
          {view.state === "analysed" && (
            <li>
              <a className="link" href={apiAddress(`/files/${view.fileId}`)}>
                {i18n.t("Download it")}
              </a>
            </li>
          )}
          <li>
            <TextButton onClick={onKeep}>
              {deleteOn !== null ? i18n.t("Another reason or day") : i18n.t("Keep it")}
            </TextButton>
          </li>
          {view.state === "analysed" && (
            <li>
              <TextButton onClick={() => setDeleting(true)}>{i18n.t("Delete it now")}</TextButton>
            </li>
          )}
        </ul>
      )}
      <DeleteDialog id={view.id} isOpen={isDeleting} onLeave={() => setDeleting(false)} />
    </>
  );
}

/** Why the sound is kept, and until when. */
export function KeepForm({ view, onLeave }: { view: RecordingView; onLeave: () => void }) {
  const { i18n } = useLingui();
  const keep = useKeepAudio(view.id);
  const form = useSchemaForm(RecordingKeep, {
    mode: "onSubmit",
    defaultValues: {
      keepReason: view.keepReason ?? "",
      deleteOn: view.deleteOn ?? (null as unknown as string),
    },
  });
  return (
    <Form
      aria-label={i18n.t("Keep the sound")}
      onSubmit={form.handleSubmit((body) =>
        keep.mutate(body, { onSuccess: onLeave, onError: showRecordingIssuesOn(form, i18n) }),
      )}
    >
      <TextAreaField form={form} name="keepReason" label={i18n.t("Why it is kept")} rows={2} />
      <DateField form={form} name="deleteOn" label={i18n.t("Deleted on")} />
      <FormProblem error={keep.error} />
      <FormActions>
        <SubmitButton isBusy={keep.isPending}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onLeave}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}

function DeleteDialog({
  id,
  isOpen,
  onLeave,
}: {
  id: string;
  isOpen: boolean;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const remove = useDeleteAudio(id);
  return (
    <Dialog
      isOpen={isOpen}
      title={i18n.t("Delete the sound now?")}
      lead={i18n.t("Its levels and spectra stay. The sound can’t be brought back.")}
      onClose={onLeave}
      actions={
        <>
          <Button
            kind="primary"
            isBusy={remove.isPending}
            onClick={() => remove.mutate({}, { onSuccess: onLeave })}
          >
            {i18n.t("Delete it now")}
          </Button>
          <Button onClick={onLeave}>{i18n.t("Leave as it was")}</Button>
        </>
      }
    >
      <FormProblem error={remove.error} />
    </Dialog>
  );
}
