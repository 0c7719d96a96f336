import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { FileView } from "../../../shared/schemas/outing";
import {
  ProtectorFileInput,
  ProtectorFileRemoval,
  type ProtectorFileView,
} from "../../../shared/schemas/protector";
import { Button } from "../../components/button";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
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
import { protectorQueries, useProtectorFiles } from "./queries";

/** Certificates and test reports of a model: to be taken home, attached, and taken off with a reason. */
export function DataSheets({
  modelId,
  mayChange,
  timeZone,
}: {
  modelId: string;
  mayChange: boolean;
  timeZone: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const files = useQuery(protectorQueries.files(modelId));
  const [open, setOpen] = useState<"attach" | ProtectorFileView | null>(null);
  const close = () => setOpen(null);
  return (
    <>
      <DataTable<ProtectorFileView>
        caption={i18n.t("Data sheets")}
        state={files.isSuccess ? "ready" : files.isError ? "failed" : "loading"}
        error={files.error}
        onRetry={() => void files.refetch()}
        rows={files.data?.rows ?? []}
        rowKey={({ id }) => id}
        isTwoLine
        stacksOnPhone
        empty={
          <Empty title={i18n.t("No data sheet is attached.")}>
            {i18n.t("Certificate and test report can stand here as PDF or photograph.")}
          </Empty>
        }
        columns={[
          {
            id: "title",
            head: i18n.t("Title"),
            isRowHead: true,
            cell: ({ fileId, title, fileName, sizeBytes }) => (
              <span className="two-lines">
                <a className="link" href={`/api/files/${fileId}`} download>
                  {title}
                </a>
                <span className="beneath">
                  {fileName}, {formatNumber(sizeBytes / 1024, 0, locale)} kB
                </span>
              </span>
            ),
          },
          {
            id: "when",
            head: i18n.t("Attached"),
            cell: ({ authorName, createdAt }) => (
              <span className="two-lines">
                {formatInstant(createdAt, timeZone, locale)}
                <span className="beneath">{authorName}</span>
              </span>
            ),
          },
          ...(mayChange
            ? [
                {
                  id: "remove",
                  head: <span className="sr-only">{i18n.t("What can be done")}</span>,
                  kind: "right" as const,
                  cell: (file: ProtectorFileView) => (
                    <TextButton
                      aria-label={i18n.t("Take {title} off", { title: file.title })}
                      onClick={() => setOpen(file)}
                    >
                      {i18n.t("Take off")}
                    </TextButton>
                  ),
                },
              ]
            : []),
        ]}
      />
      {mayChange && open === null && (
        <p className="after-table">
          <Button onClick={() => setOpen("attach")}>{i18n.t("Attach a data sheet")}</Button>
        </p>
      )}
      {open === "attach" && <AttachForm modelId={modelId} onDone={close} />}
      {open !== null && open !== "attach" && (
        <RemoveForm key={open.id} modelId={modelId} file={open} onDone={close} />
      )}
    </>
  );
}

function AttachForm({ modelId, onDone }: { modelId: string; onDone: () => void }) {
  const { i18n } = useLingui();
  const { attach } = useProtectorFiles(modelId);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const [sent, setSent] = useState<readonly FileView[]>([]);
  const form = useSchemaForm(ProtectorFileInput, {
    defaultValues: { fileId: "", title: "" },
    // A file is sent once; its form is not worth keeping without it.
    keepAs: null,
  });
  const fileError = form.formState.errors.fileId;
  return (
    <Form
      className="section-form"
      aria-label={i18n.t("Attach a data sheet")}
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
  modelId,
  file,
  onDone,
}: {
  modelId: string;
  file: ProtectorFileView;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const { remove } = useProtectorFiles(modelId);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(ProtectorFileRemoval, {
    defaultValues: { reason: "" },
    keepAs: `file ${file.id}`,
  });
  return (
    <Form
      className="section-form"
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
