import { useLingui } from "@lingui/react";
import { useEffect, useRef, useState } from "react";
import { formatLevel } from "../../../shared/format/level";
import { issueText } from "../../../shared/problems/issue-text";
import { recordingText } from "../../../shared/recordings/recording-text";
import type { CalibrationTone } from "../../../shared/schemas/recording";
import { Field } from "../../components/form";
import { Status } from "../../components/status";
import { ApiError } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useMeasuredTone } from "../../lib/measured-tone";
import { problemText } from "../../lib/problem-text";
import { ACCEPT } from "./file-fields";
import { measureTone } from "./queries";

/** What a calibrator can give, dB. */
const LOWEST_DB = 70;
const HIGHEST_DB = 130;

/** A calibrator's tone through one microphone: measured as soon as it is chosen, and again for another level. Not kept. */
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
  const [file, setFile] = useState<File | null>(null);
  const isLevelRead = toneDb !== null && toneDb >= LOWEST_DB && toneDb <= HIGHEST_DB;
  const measured = useMeasuredTone(file, isLevelRead ? { siteId, toneDb } : null, measureTone);
  const tell = useRef(onTone);
  tell.current = onTone;
  useEffect(() => tell.current(measured.tone), [measured.tone]);

  function fault(): string | undefined {
    if (file && !isLevelRead) return i18n.t("Say first what the calibrator gives.");
    if (!measured.error) return undefined;
    const [issue] = measured.error instanceof ApiError ? measured.error.issues : [];
    return issue
      ? (recordingText(i18n, issue.code, issue.params) ?? issueText(i18n, issue))
      : problemText(i18n, measured.error);
  }
  const heard = tone?.channels.flatMap((channel, index) => (channel ? [index + 1] : [])) ?? [];
  return (
    <Field
      label={label}
      error={fault() ?? (measured.isPending ? undefined : error)}
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
            onChange={(event) => setFile(event.target.files?.[0] ?? null)}
          />
          {measured.isPending && <Status>{i18n.t("The tone is being measured.")}</Status>}
        </>
      )}
    </Field>
  );
}
