import { useLingui } from "@lingui/react";
import { useEffect, useRef, useState } from "react";
import { z } from "zod";
import { LevelDb } from "../../../shared/schemas/common";
import type { HistoryView } from "../../../shared/schemas/history";
import { Form, NumberField, RadioGroup, TextAreaField, useSchemaForm } from "../../components/form";
import { isSameValue } from "../../lib/same-value";
import type { Drawing } from "./use-drawing";

export type Unaccounted = NonNullable<HistoryView["leftOut"]>;

const LeftOutFields = z
  .object({
    leftOut: z.object({
      how: z.enum(["unknown", "like-the-rest", "quiet"]),
      levelDb: LevelDb.nullable(),
    }),
    keptReason: z.string().nullable(),
  })
  .check(({ value, issues }) => {
    if (value.leftOut.how === "quiet" && value.leftOut.levelDb === null)
      issues.push({
        code: "custom",
        input: value,
        path: ["leftOut", "levelDb"],
        params: { code: "required" },
      });
  });
type LeftOutValues = z.infer<typeof LeftOutFields>;

const fieldsOf = ({ leftOut }: Pick<HistoryView, "leftOut">): LeftOutValues => ({
  leftOut: {
    how: leftOut?.how ?? "unknown",
    levelDb: leftOut?.how === "quiet" ? leftOut.levelDb : null,
  },
  keptReason: null,
});

const unaccountedOf = ({ leftOut }: LeftOutValues): Unaccounted =>
  leftOut.how === "quiet"
    ? { how: "quiet", levelDb: leftOut.levelDb as number }
    : { how: leftOut.how };

/** What a drawing says beside its stretches. */
export interface SaidOfLeftOut {
  leftOut: Unaccounted | null;
  keptReason: string | null;
}

/** How the time that is left out was: asked wherever a run that speaks for a shift leaves some out. */
export function useLeftOut(history: HistoryView, drawing: Drawing) {
  const [doubt, setDoubt] = useState<string | null>(null);
  const form = useSchemaForm(LeftOutFields, {
    keepAs: `left-out ${history.id}`,
    defaultValues: fieldsOf(history),
  });
  const isAny = drawing.drawn.some(({ kind }) => kind === "left-out");
  const isAsked = isAny && history.covers !== "part";
  const { leftOut } = form.watch();
  const seen = useRef(history.revision);
  // What was said holds for the stretches that it was said of: others are asked about anew.
  const spans = drawing.drawn
    .filter(({ kind }) => kind === "left-out")
    .map(({ fromS, toS }) => `${fromS}-${toS}`)
    .join();
  const saidOf = useRef(spans);
  useEffect(() => {
    if (saidOf.current === spans) return;
    saidOf.current = spans;
    if (seen.current === history.revision)
      form.setValue("leftOut", { how: "unknown", levelDb: null }, { shouldDirty: true });
  }, [form, history.revision, spans]);
  useEffect(() => {
    // What was typed before a reload stands over the same revision.
    if (seen.current === history.revision) return;
    seen.current = history.revision;
    form.reset(fieldsOf(history));
    setDoubt(null);
  }, [form, history]);
  return {
    form,
    isAsked,
    isChanged: isAsked && !isSameValue(leftOut, fieldsOf(history).leftOut),
    doubt,
    /** What the server asks about the run, as a sentence; it is answered in the form. */
    ask: (sentence: string | null) => setDoubt(sentence),
    /** Calls back with what is said, once it can be read. */
    read: (then: (said: SaidOfLeftOut) => void) => {
      if (!isAsked) {
        then({ leftOut: isAny ? (history.leftOut ?? { how: "unknown" }) : null, keptReason: null });
        return;
      }
      void form.handleSubmit((values) =>
        then({ leftOut: unaccountedOf(values), keptReason: values.keptReason?.trim() || null }),
      )();
    },
  };
}

export type LeftOutAnswer = ReturnType<typeof useLeftOut>;

export function LeftOutForm({ answer, onSave }: { answer: LeftOutAnswer; onSave: () => void }) {
  const { i18n } = useLingui();
  const { form, doubt } = answer;
  const how = form.watch("leftOut.how");
  return (
    <Form
      className="left-out-form no-print"
      aria-label={i18n.t("How the time left out was")}
      onSubmit={(event) => {
        event.preventDefault();
        onSave();
      }}
    >
      <RadioGroup
        form={form}
        name="leftOut.how"
        label={i18n.t("The time left out was")}
        choices={[
          {
            value: "unknown",
            label: i18n.t("not known"),
            note: i18n.t("What is kept may then prove Over, never Under."),
          },
          {
            value: "like-the-rest",
            label: i18n.t("like the rest"),
            note: i18n.t("What is kept stands for it; the result is marked as projected."),
          },
          {
            value: "quiet",
            label: i18n.t("quiet"),
            note: i18n.t("A level for it is added to what is kept."),
          },
        ]}
      />
      {how === "quiet" && (
        <NumberField
          form={form}
          name="leftOut.levelDb"
          label={i18n.t("Level there")}
          unit="dB(A)"
        />
      )}
      {doubt !== null && (
        <>
          <p className="field-error" role="alert">
            {doubt}
          </p>
          <TextAreaField
            form={form}
            name="keptReason"
            label={i18n.t("Keep it, because…")}
            rows={2}
            note={i18n.t("Whatever uses this run then loses the standard’s name.")}
          />
        </>
      )}
    </Form>
  );
}
