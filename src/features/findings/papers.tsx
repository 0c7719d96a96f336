import { useLingui } from "@lingui/react";
import { useState } from "react";
import { formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import {
  FindingFileInput,
  FindingFileRemoval,
  type FindingFileView,
} from "../../../shared/schemas/follow-up";
import type { FileView } from "../../../shared/schemas/outing";
import { Button } from "../../components/button";
import { FileInput } from "../../components/file-input";
import {
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
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { useFindingFiles } from "./queries";

/** Offers, drawings, photographs: what belongs to a finding on paper. */
export function Papers({
  findingId,
  files,
  timeZone,
  canChange,
}: {
  findingId: string;
  files: readonly FindingFileView[];
  timeZone: string;
  canChange: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [open, setOpen] = useState<"attach" | FindingFileView | null>(null);
  const close = () => setOpen(null);
  return (
    <>
      {files.length === 0 ? (
        <p className="by">{i18n.t("No paper is attached.")}</p>
      ) : (
        <ul className="papers">
          {files.map((file) => (
            <li key={file.id}>
              <a className="link" href={`/api/files/${file.fileId}`} download>
                {file.title}
              </a>{" "}
              <span className="by">
                {file.fileName}, {formatNumber(file.sizeBytes / 1024, 0, locale)} kB,{" "}
                {file.authorName && i18n.t("by {name}", { name: file.authorName }).concat(", ")}
                {formatInstant(file.createdAt, timeZone, locale)}
              </span>{" "}
              {canChange && (
                <TextButton
                  aria-label={i18n.t("Take {title} off", { title: file.title })}
                  onClick={() => setOpen(file)}
                >
                  {i18n.t("Take off")}
                </TextButton>
              )}
            </li>
          ))}
        </ul>
      )}
      {canChange && open === null && (
        <p className="finding-more no-print">
          <Button onClick={() => setOpen("attach")}>{i18n.t("Attach a paper")}</Button>
        </p>
      )}
      {open === "attach" && <AttachForm findingId={findingId} onDone={close} />}
      {open !== null && open !== "attach" && (
        <RemoveForm key={open.id} findingId={findingId} file={open} onDone={close} />
      )}
    </>
  );
}

function AttachForm({ findingId, onDone }: { findingId: string; onDone: () => void }) {
  const { i18n } = useLingui();
  const { attach } = useFindingFiles(findingId);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const [sent, setSent] = useState<readonly FileView[]>([]);
  const form = useSchemaForm(FindingFileInput, {
    defaultValues: { fileId: "", title: "" },
    // A file is sent once; its form is not worth keeping without it.
    keepAs: null,
  });
  const fileError = form.formState.errors.fileId;
  return (
    <Form
      className="finding-form"
      aria-label={i18n.t("Attach a paper")}
      onSubmit={form.handleSubmit((body) => {
        if (!begin()) return;
        attach.mutate(
          { body, key: changeKey.keyFor(body) },
          {
            onSuccess: () => {
              changeKey.forget();
              onDone();
            },
            onError: showIssuesOn(form, i18n),
            onSettled: end,
          },
        );
      })}
    >
      <FileInput
        label={i18n.t("File, PDF or photograph")}
        accept="application/pdf,image/*"
        atMost={1}
        isOptional={false}
        fault={
          fileError?.type === "invalid_format" ? i18n.t("Choose a file first.") : fileError?.message
        }
        files={sent}
        onFiles={(files) => {
          const [file] = files;
          setSent(files);
          form.setValue("fileId", file?.id ?? "", { shouldValidate: form.formState.isSubmitted });
          if (file && form.getValues("title") === "")
            form.setValue("title", file.name.replace(/\.[a-z\d]+$/i, ""), { shouldDirty: true });
        }}
      />
      <TextField form={form} name="title" label={i18n.t("Title")} />
      <FormProblem error={attach.error} />
      <FormActions>
        <SubmitButton isBusy={attach.isPending}>{i18n.t("Attach it")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}

function RemoveForm({
  findingId,
  file,
  onDone,
}: {
  findingId: string;
  file: FindingFileView;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const { remove } = useFindingFiles(findingId);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(FindingFileRemoval, {
    defaultValues: { reason: "" },
    keepAs: `file ${file.id}`,
  });
  return (
    <Form
      className="finding-form"
      aria-label={i18n.t("Take {title} off", { title: file.title })}
      onSubmit={form.handleSubmit(({ reason }) => {
        if (!begin()) return;
        remove.mutate(
          { fileId: file.id, reason, key: changeKey.keyFor({ id: file.id, reason }) },
          {
            onSuccess: () => {
              changeKey.forget();
              onDone();
            },
            onError: showIssuesOn(form, i18n),
            onSettled: end,
          },
        );
      })}
    >
      <TextAreaField
        form={form}
        name="reason"
        rows={2}
        label={i18n.t("Why {title} goes", { title: file.title })}
        note={i18n.t("The trail keeps that it stood here, and the reason.")}
      />
      <FormProblem error={remove.error} />
      <FormActions>
        <SubmitButton isBusy={remove.isPending}>{i18n.t("Take it off")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
