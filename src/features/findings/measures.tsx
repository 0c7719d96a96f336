import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { Fragment, useState } from "react";
import { formatDate, formatShortDate } from "../../../shared/format/date";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import {
  CONTROLS,
  type FollowUpView,
  MeasureInput,
  MeasureStrike,
  MeasureView,
} from "../../../shared/schemas/follow-up";
import { Button, ButtonLink } from "../../components/button";
import {
  DateField,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { RecordForm } from "../../components/record-form";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { controlNote, controlWord } from "./control-words";
import { useFollowUpChanged, useStrikeMeasure } from "./queries";

type Open = { kind: "new" } | { kind: "change" | "strike"; measure: MeasureView };

function whenWords(i18n: I18n, locale: Locale, measure: MeasureView, today: string): string {
  const { plannedOn, doneOn } = measure;
  if (doneOn !== null) return i18n.t("done {date}", { date: formatShortDate(doneOn, locale) });
  const date = formatShortDate(plannedOn ?? "", locale);
  return plannedOn !== null && plannedOn < today
    ? i18n.t("planned for {date}, overdue", { date })
    : i18n.t("planned for {date}", { date });
}

/** Measures under the five kinds of control, in the order in which they are to be tried. */
export function Measures({
  findingId,
  measures,
  owners,
  today,
  canChange,
  tryPath,
}: {
  findingId: string;
  measures: readonly MeasureView[];
  owners: FollowUpView["owners"];
  today: string;
  canChange: boolean;
  /** Where measures are tried before one is entered; null: there is no one day to try them on. */
  tryPath: string | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [open, setOpen] = useState<Open | null>(null);
  const changed = useFollowUpChanged(findingId);
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const close = () => {
    setOpen(null);
    moveFocus("[data-new-measure]", "button");
  };
  return (
    <div ref={place} className="contents">
      <dl className="measures">
        {CONTROLS.map((control) => {
          const entries = measures.filter((measure) => measure.control === control);
          return (
            <Fragment key={control}>
              <dt>
                {controlWord(i18n, control)}
                <span className="beneath">{controlNote(i18n, control)}</span>
              </dt>
              <dd>
                {entries.length === 0 && <p className="by">{i18n.t("nothing entered")}</p>}
                {entries.map((measure) => (
                  <div key={measure.id} className="measure">
                    <p className={measure.struckReason === null ? undefined : "is-struck"}>
                      {measure.what}
                    </p>
                    <p className="by">
                      {measure.struckReason === null
                        ? whenWords(i18n, locale, measure, today)
                        : i18n.t("struck out: {reason}", { reason: measure.struckReason })}
                      {measure.ownerName && `, ${isolate(measure.ownerName)}`}
                      {canChange && measure.struckReason === null && (
                        <>
                          {". "}
                          <TextButton
                            aria-label={i18n.t("Change: {what}", { what: measure.what })}
                            onClick={() => setOpen({ kind: "change", measure })}
                          >
                            {i18n.t("Change")}
                          </TextButton>{" "}
                          <TextButton
                            aria-label={i18n.t("Strike out: {what}", { what: measure.what })}
                            onClick={() => setOpen({ kind: "strike", measure })}
                          >
                            {i18n.t("Strike out")}
                          </TextButton>
                        </>
                      )}
                    </p>
                    {open !== null && open.kind !== "new" && open.measure.id === measure.id && (
                      <div className="finding-form">
                        {open.kind === "change" ? (
                          <MeasureForm
                            key={measure.id}
                            findingId={findingId}
                            measure={measure}
                            owners={owners}
                            onSaved={() => {
                              void changed();
                              close();
                            }}
                            onLeave={close}
                          />
                        ) : (
                          <StrikeForm findingId={findingId} measure={measure} onDone={close} />
                        )}
                      </div>
                    )}
                  </div>
                ))}
              </dd>
            </Fragment>
          );
        })}
      </dl>
      {canChange && (
        <p className="finding-more no-print">
          <Button
            data-new-measure
            aria-expanded={open?.kind === "new"}
            onClick={() => setOpen(open?.kind === "new" ? null : { kind: "new" })}
          >
            {i18n.t("Enter a measure")}
          </Button>{" "}
          {tryPath && <ButtonLink to={tryPath}>{i18n.t("Try changes")}</ButtonLink>}
        </p>
      )}
      {open?.kind === "new" && (
        <div className="finding-form">
          <MeasureForm
            findingId={findingId}
            measure={null}
            owners={owners}
            onSaved={() => {
              void changed();
              close();
            }}
            onLeave={close}
          />
        </div>
      )}
    </div>
  );
}

function MeasureForm({
  findingId,
  measure,
  owners,
  onSaved,
  onLeave,
}: {
  findingId: string;
  measure: MeasureView | null;
  owners: FollowUpView["owners"];
  onSaved: () => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const toBody = ({ control, what, ownerId, plannedOn, doneOn }: MeasureView): MeasureInput => ({
    control,
    what,
    ownerId,
    plannedOn,
    doneOn,
  });
  const dateText = (date: string | null) => (date === null ? "–" : formatDate(date, locale));
  return (
    <RecordForm
      name={measure ? i18n.t("Change the measure") : i18n.t("New measure")}
      schema={MeasureInput}
      viewSchema={MeasureView}
      path={`/findings/${findingId}/measures`}
      record={measure}
      toBody={toBody}
      defaultValues={
        measure
          ? toBody(measure)
          : { control: "engineer", what: "", ownerId: null, plannedOn: null, doneOn: null }
      }
      conflictTitle={i18n.t("Someone saved this measure before you")}
      fields={[
        {
          key: "control",
          label: i18n.t("Kind of control"),
          show: ({ control }) => controlWord(i18n, control),
        },
        { key: "what", label: i18n.t("What is done"), show: ({ what }) => what },
        {
          key: "ownerId",
          label: i18n.t("In whose hands"),
          show: ({ ownerId }) => owners.find(({ id }) => id === ownerId)?.name ?? "–",
        },
        {
          key: "plannedOn",
          label: i18n.t("Planned for"),
          show: ({ plannedOn }) => dateText(plannedOn),
        },
        { key: "doneOn", label: i18n.t("Done on"), show: ({ doneOn }) => dateText(doneOn) },
      ]}
      onSaved={onSaved}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          <SelectField
            form={form}
            name="control"
            label={i18n.t("Kind of control")}
            choices={CONTROLS.map((value) => ({
              value,
              label: i18n.t("{control}: {note}", {
                control: controlWord(i18n, value),
                note: controlNote(i18n, value),
              }),
            }))}
          />
          <TextAreaField form={form} name="what" label={i18n.t("What is done")} rows={2} />
          <SelectField
            form={form}
            name="ownerId"
            label={i18n.t("In whose hands")}
            emptyLabel={i18n.t("nobody named yet")}
            choices={owners.map(({ id, name }) => ({ value: id, label: name }))}
            isOptional
          />
          <DateField form={form} name="plannedOn" label={i18n.t("Planned for")} isOptional />
          <DateField
            form={form}
            name="doneOn"
            label={i18n.t("Done on")}
            note={i18n.t("From the day after it, measured days count as after the measure.")}
            isOptional
          />
        </>
      )}
    </RecordForm>
  );
}

function StrikeForm({
  findingId,
  measure,
  onDone,
}: {
  findingId: string;
  measure: MeasureView;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const strike = useStrikeMeasure(findingId);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(MeasureStrike, {
    defaultValues: { reason: "" },
    keepAs: `strike ${measure.id}`,
  });
  return (
    <Form
      aria-label={i18n.t("Strike out: {what}", { what: measure.what })}
      onSubmit={form.handleSubmit(({ reason }) => {
        if (!begin()) return;
        strike.mutate(
          { measure, reason, key: changeKey.keyFor({ id: measure.id, reason }) },
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
        label={i18n.t("Why it is struck out")}
        note={i18n.t("It stays to be read, crossed out, with the reason.")}
      />
      <FormProblem error={strike.error} />
      <FormActions>
        <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike out")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
