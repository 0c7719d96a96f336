import { useLingui } from "@lingui/react";
import { useState } from "react";
import { issueText } from "../../shared/problems/issue-text";
import { FileView } from "../../shared/schemas/outing";
import { ApiError, api } from "../lib/api";
import { problemText } from "../lib/problem-text";
import { Field } from "./form";
import { TextButton } from "./link";

async function attachFile(file: File): Promise<FileView> {
  const body = new FormData();
  body.set("file", file);
  return api.post("/files", { body, schema: FileView });
}

/** Files are sent as they are chosen; what they belong to names them when it is saved. */
export function FileInput({
  label,
  accept,
  atMost,
  isCamera = false,
  isOptional = true,
  fault,
  files,
  onFiles,
}: {
  label: string;
  accept: string;
  atMost: number;
  /** Opens a phone's camera. */
  isCamera?: boolean;
  isOptional?: boolean;
  /** What is wrong with the field, beside what was wrong with a file. */
  fault?: string | undefined;
  files: readonly FileView[];
  onFiles: (files: readonly FileView[]) => void;
}) {
  const { i18n } = useLingui();
  const [isSending, setIsSending] = useState(false);
  const [refused, setRefused] = useState<{ name: string; error: string } | null>(null);

  async function send(chosen: File) {
    setIsSending(true);
    setRefused(null);
    try {
      const sent = await attachFile(chosen);
      onFiles([...files.filter(({ id }) => id !== sent.id), sent].slice(-atMost));
    } catch (failure) {
      const [issue] = failure instanceof ApiError ? failure.issues : [];
      const error = issue ? issueText(i18n, issue) : problemText(i18n, failure);
      setRefused({ name: chosen.name, error });
    } finally {
      setIsSending(false);
    }
  }

  return (
    <Field label={label} error={refused?.error ?? fault} isOptional={isOptional}>
      {({ readOnly: _, "aria-required": __, ...wires }) => (
        <div className="file-input">
          <input
            {...wires}
            type="file"
            className="input"
            accept={accept}
            capture={isCamera ? "environment" : undefined}
            disabled={isSending}
            aria-busy={isSending}
            onChange={(event) => {
              const [chosen] = event.target.files ?? [];
              event.target.value = "";
              if (chosen) void send(chosen);
            }}
          />
          {isSending && <p role="status">{i18n.t("Sending…")}</p>}
          {refused && <p>{i18n.t("{name}: not taken", { name: refused.name })}</p>}
          {files.length > 0 && (
            <ul>
              {files.map((file) => (
                <li key={file.id}>
                  {file.name}{" "}
                  <TextButton onClick={() => onFiles(files.filter(({ id }) => id !== file.id))}>
                    {i18n.t("Take out")}
                    <span className="sr-only"> {file.name}</span>
                  </TextButton>
                </li>
              ))}
            </ul>
          )}
        </div>
      )}
    </Field>
  );
}
