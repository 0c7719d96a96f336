import { useLingui } from "@lingui/react";
import { useState } from "react";
import { z } from "zod";
import { findingWord } from "../../../shared/findings/words";
import { formatShortDate } from "../../../shared/format/date";
import { isolate } from "../../../shared/i18n/isolate";
import { IsoDate, Reason } from "../../../shared/schemas/common";
import type { FindingKind } from "../../../shared/schemas/finding";
import { CONTROLS, Control } from "../../../shared/schemas/follow-up";
import type { PlanStepView, PlanView } from "../../../shared/schemas/plan";
import { Button } from "../../components/button";
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
import { TextButton, TextLink } from "../../components/link";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { paths } from "../../paths";
import { type StepChange, useChangeStep } from "./queries";

/** What stands open beneath the list, or beneath a step of it. */
type Open = { kind: "add" } | { kind: "change" | "cannot"; stepId: string };

/** Sends one change of a step at a time. */
function useSendStep(planId: string) {
  const change = useChangeStep(planId);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  return {
    ...change,
    send: (
      wanted: StepChange,
      {
        onDone,
        onError = () => undefined,
      }: { onDone: () => void; onError?: (error: unknown) => void },
    ) => {
      if (!begin()) return;
      change.mutate(
        { change: wanted, key: changeKey.keyFor(wanted) },
        {
          onSuccess: () => {
            changeKey.forget();
            onDone();
          },
          onError,
          onSettled: end,
        },
      );
    },
  };
}

/** A plan turned into what has to be done, by whom and until when. */
export function PlanSteps({
  plan,
  today,
  controlWord,
}: {
  plan: PlanView;
  today: string;
  controlWord: (control: Control) => string;
}) {
  const { i18n } = useLingui();
  const [open, setOpen] = useState<Open | null>(null);
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const isFollowed = plan.can.step && plan.putAsideReason === null;
  const close = () => {
    setOpen(null);
    moveFocus("[data-new-step]", "button");
  };
  return (
    <div ref={place} className="contents">
      {plan.steps.length === 0 && <p className="beneath">{i18n.t("No step is entered yet.")}</p>}
      <ol className="change-list">
        {plan.steps.map((step) => (
          <li key={step.id}>
            <Step
              plan={plan}
              step={step}
              today={today}
              isFollowed={isFollowed}
              controlWord={controlWord}
              open={
                open !== null && open.kind !== "add" && open.stepId === step.id ? open.kind : null
              }
              onOpen={(kind) => setOpen({ kind, stepId: step.id })}
              onClose={close}
            />
          </li>
        ))}
      </ol>
      {isFollowed && open?.kind !== "add" && (
        <p className="no-print">
          <Button data-new-step onClick={() => setOpen({ kind: "add" })}>
            {i18n.t("Enter a step")}
          </Button>
        </p>
      )}
      {isFollowed && open?.kind === "add" && (
        <div className="no-print">
          <AddForm plan={plan} controlWord={controlWord} onClose={close} />
        </div>
      )}
    </div>
  );
}

function Step({
  plan,
  step,
  today,
  isFollowed,
  controlWord,
  open,
  onOpen,
  onClose,
}: {
  plan: PlanView;
  step: PlanStepView;
  today: string;
  isFollowed: boolean;
  controlWord: (control: Control) => string;
  open: "change" | "cannot" | null;
  onOpen: (kind: "change" | "cannot") => void;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { send, isPending, error } = useSendStep(plan.id);
  const { id: stepId, revision, what, mends } = step;
  const date = (on: string | null) => (on === null ? "" : formatShortDate(on, locale));
  const words = {
    open:
      step.dueOn < today
        ? i18n.t("due {date}, overdue", { date: date(step.dueOn) })
        : i18n.t("due {date}", { date: date(step.dueOn) }),
    done: i18n.t("done {date}", { date: date(step.markedOn) }),
    cannot: i18n.t("can’t, because: {reason}", { reason: step.reason ?? "" }),
  }[step.state];
  const mark = (state: "done" | "open") =>
    send(
      { kind: "mark", stepId, revision, body: { state, reason: null } },
      { onDone: () => undefined },
    );
  return (
    <>
      <span>{what}</span>{" "}
      <span className="beneath block">
        {[step.ownerName && isolate(step.ownerName), words].filter(Boolean).join(", ")}
        {mends && (
          <span className="block">
            {i18n.t("{control}, for the finding", { control: controlWord(mends.control) })}{" "}
            <TextLink to={paths.finding(mends.findingId)}>
              {[
                mends.workerName && isolate(mends.workerName),
                findingWord(i18n, mends.kind as FindingKind),
              ]
                .filter(Boolean)
                .join(": ")}
            </TextLink>
          </span>
        )}
      </span>
      {isFollowed && (
        <span className="change-actions no-print">
          {step.state === "open" ? (
            <>
              <TextButton
                aria-label={i18n.t("Mark done: {what}", { what })}
                disabled={isPending}
                onClick={() => mark("done")}
              >
                {i18n.t("Mark done")}
              </TextButton>
              <TextButton
                aria-label={i18n.t("Can’t, because…: {what}", { what })}
                onClick={() => onOpen("cannot")}
              >
                {i18n.t("Can’t, because…")}
              </TextButton>
              <TextButton
                aria-label={i18n.t("Change: {what}", { what })}
                onClick={() => onOpen("change")}
              >
                {i18n.t("Change")}
              </TextButton>
            </>
          ) : (
            <TextButton
              aria-label={i18n.t("Open again: {what}", { what })}
              disabled={isPending}
              onClick={() => mark("open")}
            >
              {i18n.t("Open again")}
            </TextButton>
          )}
        </span>
      )}
      <FormProblem error={error} />
      {isFollowed && open === "cannot" && <CannotForm plan={plan} step={step} onClose={onClose} />}
      {isFollowed && open === "change" && <ChangeForm plan={plan} step={step} onClose={onClose} />}
    </>
  );
}

const StepFacts = z.object({ what: Reason, ownerId: z.uuid().nullable(), dueOn: IsoDate });
const NewStep = StepFacts.extend({ findingId: z.uuid().nullable(), control: Control });

function AddForm({
  plan,
  controlWord,
  onClose,
}: {
  plan: PlanView;
  controlWord: (control: Control) => string;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const { send, isPending, error } = useSendStep(plan.id);
  const form = useSchemaForm(NewStep, {
    keepAs: `new step ${plan.id}`,
    defaultValues: {
      what: "",
      ownerId: null,
      dueOn: null as unknown as string,
      findingId: null,
      control: "organise",
    },
  });
  return (
    <Form
      aria-label={i18n.t("New step")}
      onSubmit={form.handleSubmit(({ findingId, control, ...facts }) =>
        send(
          {
            kind: "add",
            body: { ...facts, mends: findingId === null ? null : { findingId, control } },
          },
          { onDone: onClose, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <TextAreaField form={form} name="what" label={i18n.t("What is done")} rows={2} />
      <SelectField
        form={form}
        name="ownerId"
        label={i18n.t("In whose hands")}
        emptyLabel={i18n.t("nobody named yet")}
        choices={plan.owners.map(({ id, name }) => ({ value: id, label: name }))}
        isOptional
      />
      <DateField form={form} name="dueOn" label={i18n.t("Until")} />
      {plan.findings.length > 0 && (
        <SelectField
          form={form}
          name="findingId"
          label={i18n.t("Measure for the finding")}
          emptyLabel={i18n.t("none")}
          choices={plan.findings.map(({ id, kind, workerName }) => ({
            value: id,
            label: [workerName, findingWord(i18n, kind as FindingKind)].filter(Boolean).join(": "),
          }))}
          isOptional
        />
      )}
      {form.watch("findingId") && (
        <SelectField
          form={form}
          name="control"
          label={i18n.t("Kind of control")}
          choices={CONTROLS.map((value) => ({ value, label: controlWord(value) }))}
        />
      )}
      <FormProblem error={error} />
      <FormActions>
        <SubmitButton isBusy={isPending}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onClose}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}

type StepFormProps = { plan: PlanView; step: PlanStepView; onClose: () => void };

function ChangeForm({ plan, step, onClose }: StepFormProps) {
  const { i18n } = useLingui();
  const { send, isPending, error } = useSendStep(plan.id);
  const { what, ownerId, dueOn } = step;
  const form = useSchemaForm(StepFacts, {
    keepAs: `step ${step.id}`,
    defaultValues: { what, ownerId, dueOn },
  });
  return (
    <Form
      aria-label={i18n.t("Change the step")}
      onSubmit={form.handleSubmit((body) =>
        send(
          { kind: "change", stepId: step.id, revision: step.revision, body },
          { onDone: onClose, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <TextAreaField form={form} name="what" label={i18n.t("What is done")} rows={2} />
      <SelectField
        form={form}
        name="ownerId"
        label={i18n.t("In whose hands")}
        emptyLabel={i18n.t("nobody named yet")}
        choices={plan.owners.map(({ id, name }) => ({ value: id, label: name }))}
        isOptional
      />
      <DateField form={form} name="dueOn" label={i18n.t("Until")} />
      <FormProblem error={error} />
      <FormActions>
        <SubmitButton isBusy={isPending}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onClose}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}

const Because = z.object({ reason: Reason });

function CannotForm({ plan, step, onClose }: StepFormProps) {
  const { i18n } = useLingui();
  const { send, isPending, error } = useSendStep(plan.id);
  const form = useSchemaForm(Because, {
    keepAs: `cannot ${step.id}`,
    defaultValues: { reason: "" },
  });
  return (
    <Form
      aria-label={i18n.t("Can’t, because…")}
      onSubmit={form.handleSubmit(({ reason }) =>
        send(
          {
            kind: "mark",
            stepId: step.id,
            revision: step.revision,
            body: { state: "cannot", reason },
          },
          { onDone: onClose, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <TextAreaField form={form} name="reason" label={i18n.t("Why")} rows={2} />
      <FormProblem error={error} />
      <FormActions>
        <SubmitButton isBusy={isPending}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onClose}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
