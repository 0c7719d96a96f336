import { useLingui } from "@lingui/react";
import { useState } from "react";
import { formatLevel } from "../../../shared/format/level";
import { issueText } from "../../../shared/problems/issue-text";
import { recordingText } from "../../../shared/recordings/recording-text";
import type { CalibrationTone } from "../../../shared/schemas/recording";
import { Field } from "../../components/form";
import { Status } from "../../components/status";
import { ApiError } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { problemText } from "../../lib/problem-text";
import { ACCEPT } from "./file-fields";
import { useMeasureTone } from "./queries";

/** A calibrator's tone through one microphone: measured as soon as it is chosen, and not kept. */
export function ToneField({
  label,
  siteId,
  toneDb,
  tone,
  error,
  onTone,
}: {
  label: string;
  siteId: string;
  /** What the calibrator gives; null: not filled in. */
  toneDb: number | null;
  tone: CalibrationTone | null;
  error: string | undefined;
  onTone: (tone: CalibrationTone | null) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const measure = useMeasureTone();
  const [fault, setFault] = useState<string>();

  function choose(file: File | undefined) {
    onTone(null);
    setFault(undefined);
    if (!file) return;
    if (toneDb === null) {
      setFault(i18n.t("Say first what the calibrator gives."));
      return;
    }
    measure.mutate(
      { file, siteId, toneDb },
      {
        onSuccess: onTone,
        onError: (failure) => {
          const [issue] = failure instanceof ApiError ? failure.issues : [];
          setFault(
            issue
              ? (recordingText(i18n, issue.code, issue.params) ?? issueText(i18n, issue))
              : problemText(i18n, failure),
          );
        },
      },
    );
  }
  const heard = tone?.channels.flatMap((channel, index) => (channel ? [index + 1] : [])) ?? [];
  return (
    <Field
      label={label}
      error={fault ?? error}
      note={
        tone
          ? i18n.t("Measured: {level} dB, in channel {channels}.", {
              level: formatLevel(tone.toneDb, locale),
              channels: heard.join(", "),
            })
          : i18n.t("A few seconds with the same settings as the recordings. It is not kept.")
      }
    >
      {({ readOnly: _, ...wires }) => (
        <>
          <input
            {...wires}
            className="file-input"
            type="file"
            accept={ACCEPT}
            disabled={measure.isPending}
            onChange={(event) => choose(event.target.files?.[0])}
          />
          {measure.isPending && <Status>{i18n.t("The tone is being measured.")}</Status>}
        </>
      )}
    </Field>
  );
}
