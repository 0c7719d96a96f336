import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import { type KeyboardEvent, useRef, useState } from "react";
import { z } from "zod";
import { findingStateWord } from "../../../shared/findings/words";
import { formatShortDate } from "../../../shared/format/date";
import { type FindingStepInput, FindingView } from "../../../shared/schemas/finding";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
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
import { Status } from "../../components/status";
import { ApiError, newChangeKey } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { savedMeanwhile } from "../../lib/stale";
import { findingQueries, useFindingStep } from "./queries";

type StepKind = Exclude<FindingStepInput["kind"], "undo">;

/** From where each step may be taken: the server holds to the same. */
const STEPS_FROM: Readonly<Record<StepKind, readonly FindingView["state"][]>> = {
  "take-in-hand": ["new", "came-back", "in-hand"],
  "hand-over": ["new", "in-hand", "came-back", "done"],
  "mark-done": ["new", "in-hand", "came-back"],
  cannot: ["new", "in-hand", "came-back"],
  reopen: ["done"],
  close: ["new", "in-hand", "done", "came-back"],
  comment: ["new", "in-hand", "done", "came-back", "closed"],
};

export function stepsFor(finding: Pick<FindingView, "state" | "can">): StepKind[] {
  const rights: Readonly<Record<StepKind, boolean>> = {
    "take-in-hand": finding.can.handle,
    "hand-over": finding.can.handle,
    "mark-done": finding.can.markDone,
    cannot: finding.can.markDone,
    reopen: finding.can.handle,
    close: finding.can.handle,
    comment: finding.can.comment,
  };
  return (Object.keys(STEPS_FROM) as StepKind[]).filter(
    (kind) =>
      rights[kind] &&
      STEPS_FROM[kind].includes(finding.state) &&
      !(kind === "take-in-hand" && finding.state === "in-hand"),
  );
}

/** Escape leaves a step's form as its button does; in a dialog above it, it closes the dialog alone. */
const leaveOnEscape = (onCancel: () => void) => (event: KeyboardEvent<HTMLFormElement>) => {
  const isInDialog = event.target instanceof Element && event.target.closest("dialog") !== null;
  if (event.key === "Escape" && !event.nativeEvent.isComposing && !isInDialog) onCancel();
};

/** What a person does about a finding, chosen first, then said. */
export function StepForm({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const [chosen, setChosen] = useState<StepKind | null>(null);
  const [saved, setSaved] = useState<string | null>(null);
  const [choice, moveFocus] = useMoveFocus<HTMLDivElement>();
  const kinds = stepsFor(finding);
  const labels: Readonly<Record<StepKind, string>> = {
    "take-in-hand": i18n.t("Take in hand"),
    "hand-over": i18n.t("Hand over"),
    "mark-done": i18n.t("Mark done"),
    cannot: i18n.t("Can’t, because…"),
    reopen: i18n.t("Reopen"),
    close: i18n.t("Close"),
    comment: i18n.t("Comment"),
  };
  const current = chosen !== null && kinds.includes(chosen) ? chosen : null;
  if (kinds.length === 0) return null;
  return (
    <div className="step-form no-print">
      {/* biome-ignore lint/a11y/useSemanticElements: buttons that open a form, not form controls */}
      <div
        ref={choice}
        className="step-choice"
        role="group"
        aria-label={i18n.t("What you do about it")}
      >
        {kinds.map((kind) => (
          <Button
            key={kind}
            data-step={kind}
            aria-pressed={current === kind}
            onClick={() => {
              setChosen(current === kind ? null : kind);
              setSaved(null);
            }}
          >
            {labels[kind]}
          </Button>
        ))}
        <Status>{saved}</Status>
      </div>
      {current && (
        <Step
          key={current}
          kind={current}
          label={labels[current]}
          finding={finding}
          onDone={(kind) => {
            setChosen(null);
            setSaved(i18n.t("{step}: saved", { step: labels[kind] }));
            moveFocus("button");
          }}
          onCancel={() => {
            setChosen(null);
            moveFocus(`[data-step="${current}"]`, "button");
          }}
        />
      )}
    </div>
  );
}

/** Fields of a step: a date, or a text that some steps need. The server's own schema checks them once more. */
const TextStep = z.object({ text: z.string().trim().min(3).max(2000) });
const FreeTextStep = z.object({ text: z.string().trim().max(2000) });
const CommentStep = z.object({ text: z.string().trim().min(1).max(10_000) });
const DueStep = z.object({ dueOn: z.iso.date().nullable() });
const HandOverStep = z.object({ ownerId: z.uuid(), dueOn: z.iso.date().nullable() });

interface StepProps {
  kind: StepKind;
  label: string;
  finding: FindingView;
  /** Told which step was saved: a comment may have gone in place of one that came too late. */
  onDone: (kind: StepKind) => void;
  onCancel: () => void;
}

function Step(props: StepProps) {
  if (props.kind === "take-in-hand") return <DueForm {...props} />;
  if (props.kind === "hand-over") return <HandOverForm {...props} />;
  return <TextForm {...props} kind={props.kind} />;
}

const mayTake = (kind: FindingStepInput["kind"], { state }: FindingView): boolean =>
  kind !== "undo" && STEPS_FROM[kind].includes(state);

function useSend({ finding, onDone }: StepProps) {
  const client = useQueryClient();
  const send = useFindingStep(finding.id);
  const key = useRef(newChangeKey());
  const [current, setCurrent] = useState<FindingView | null>(null);
  const [body, setBody] = useState<FindingStepInput | null>(null);
  return {
    isPending: send.isPending,
    error: send.error,
    current,
    forget: () => setCurrent(null),
    /** What was to be sent, as long as the step may still be taken from the state that stands now. */
    again:
      body && current && mayTake(body.kind, current)
        ? () => submit(body, current.revision, () => undefined)
        : null,
    /** The words of a step that can't be taken any more go as a comment; null where there are none. */
    asComment:
      body && current && "text" in body && body.text !== "" && mayTake("comment", current)
        ? () => submit({ kind: "comment", text: body.text }, current.revision, () => undefined)
        : null,
    /** The page shows the finding as it stands now. */
    takeSaved: () => {
      if (current) client.setQueryData(findingQueries.one(finding.id).queryKey, current);
    },
    submit,
  };

  function submit(step: FindingStepInput, revision: number, onIssues: (error: unknown) => void) {
    setBody(step);
    // A promise, as the form may be gone once the finding has its new state.
    send.mutateAsync({ body: step, revision, key: key.current }).then(
      () => step.kind !== "undo" && onDone(step.kind),
      (error: unknown) => {
        // The same change goes again under the same key only where nobody knows whether it arrived.
        if (!(error instanceof ApiError) || error.status !== 0) key.current = newChangeKey();
        const saved = savedMeanwhile(error, FindingView);
        if (saved) setCurrent(saved);
        else onIssues(error);
      },
    );
  }
}

function DueForm(props: StepProps) {
  const { i18n } = useLingui();
  const send = useSend(props);
  const form = useSchemaForm(DueStep, {
    defaultValues: { dueOn: props.finding.dueOn },
    keepAs: props.finding.id,
  });
  return (
    <Form
      aria-label={props.label}
      onKeyDown={leaveOnEscape(props.onCancel)}
      onSubmit={form.handleSubmit(({ dueOn }) =>
        send.submit(
          { kind: "take-in-hand", dueOn },
          props.finding.revision,
          showIssuesOn(form, i18n),
        ),
      )}
    >
      <DateField
        form={form}
        name="dueOn"
        label={i18n.t("Due")}
        note={i18n.t("By when you want it done. Empty leaves the date as it is.")}
        isOptional
      />
      <StepEnd send={send} {...props} />
    </Form>
  );
}

function HandOverForm(props: StepProps) {
  const { i18n } = useLingui();
  const send = useSend(props);
  const { data, error } = useQuery(findingQueries.followUp(props.finding.id));
  const form = useSchemaForm(HandOverStep, {
    defaultValues: { ownerId: "", dueOn: props.finding.dueOn },
    keepAs: `hand-over ${props.finding.id}`,
  });
  return (
    <Form
      aria-label={props.label}
      onKeyDown={leaveOnEscape(props.onCancel)}
      onSubmit={form.handleSubmit(({ ownerId, dueOn }) =>
        send.submit(
          { kind: "hand-over", ownerId, dueOn },
          props.finding.revision,
          showIssuesOn(form, i18n),
        ),
      )}
    >
      <SelectField
        form={form}
        name="ownerId"
        label={i18n.t("To whom")}
        emptyLabel={i18n.t("Choose a person")}
        choices={(data?.owners ?? []).map(({ id, name }) => ({ value: id, label: name }))}
      />
      <DateField
        form={form}
        name="dueOn"
        label={i18n.t("Due")}
        note={i18n.t("By when you want it done. Empty leaves the date as it is.")}
        isOptional
      />
      {!data && <FormProblem error={error} />}
      <StepEnd send={send} {...props} />
    </Form>
  );
}

function TextForm(props: StepProps & { kind: Exclude<StepKind, "take-in-hand" | "hand-over"> }) {
  const { i18n } = useLingui();
  const { kind } = props;
  const send = useSend(props);
  const schema = kind === "comment" ? CommentStep : kind === "mark-done" ? FreeTextStep : TextStep;
  const form = useSchemaForm(schema, {
    defaultValues: { text: "" },
    keepAs: `${kind} ${props.finding.id}`,
  });
  const labels = {
    "mark-done": i18n.t("What was done"),
    cannot: i18n.t("Can’t, because"),
    reopen: i18n.t("Why it is open again"),
    close: i18n.t("Why it is closed"),
    comment: i18n.t("Comment"),
  };
  return (
    <Form
      aria-label={props.label}
      onKeyDown={leaveOnEscape(props.onCancel)}
      onSubmit={form.handleSubmit(({ text }) =>
        send.submit({ kind, text }, props.finding.revision, showIssuesOn(form, i18n)),
      )}
    >
      <TextAreaField
        form={form}
        name="text"
        label={labels[kind]}
        rows={3}
        isOptional={kind === "mark-done"}
        note={
          kind === "close" ? i18n.t("It comes back only for a day dated after today.") : undefined
        }
      />
      <StepEnd send={send} {...props} />
    </Form>
  );
}

function StepEnd({
  send,
  label,
  finding,
  onCancel,
}: StepProps & { send: ReturnType<typeof useSend> }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isConflict = send.error instanceof ApiError && send.error.status === 412;
  const { again, asComment, current } = send;
  const isClosed = current?.state === "closed";
  const leave = () => {
    send.takeSaved();
    send.forget();
    onCancel();
  };
  return (
    <>
      {!isConflict && <FormProblem error={send.error} />}
      <FormActions>
        <SubmitButton isBusy={send.isPending}>{label}</SubmitButton>
        <Button onClick={onCancel}>{i18n.t("Leave it")}</Button>
      </FormActions>
      <Dialog
        isOpen={current !== null}
        onClose={send.forget}
        title={
          isClosed
            ? i18n.t("This finding was closed meanwhile")
            : i18n.t("Someone saved this finding before you")
        }
        lead={
          again
            ? i18n.t("Nothing of yours is lost; choose what stands.")
            : current && tooLateText(i18n, current)
        }
        actions={
          <>
            {again && (
              <Button
                kind="primary"
                isBusy={send.isPending}
                onClick={() => {
                  send.forget();
                  again();
                }}
              >
                {i18n.t("{step} all the same", { step: label })}
              </Button>
            )}
            {!again && asComment && (
              <Button
                isBusy={send.isPending}
                onClick={() => {
                  send.forget();
                  asComment();
                }}
              >
                {i18n.t("Pass the words on as a comment")}
              </Button>
            )}
            <Button onClick={leave}>{i18n.t("Keep what was saved")}</Button>
          </>
        }
      >
        {send.current && (
          <table className="step-conflict">
            <thead>
              <tr>
                <th scope="col">{i18n.t("Finding")}</th>
                <th scope="col">{i18n.t("You saw")}</th>
                <th scope="col">
                  {i18n.t("Saved, revision {revision}", { revision: send.current.revision })}
                </th>
              </tr>
            </thead>
            <tbody>
              <tr>
                <th scope="row">{i18n.t("State")}</th>
                <td>{findingStateWord(i18n, finding.state)}</td>
                <td className={finding.state === send.current.state ? undefined : "differs"}>
                  {findingStateWord(i18n, send.current.state)}
                </td>
              </tr>
              <tr>
                <th scope="row">{i18n.t("Due")}</th>
                <td>{finding.dueOn ? formatShortDate(finding.dueOn, locale) : "–"}</td>
                <td className={finding.dueOn === send.current.dueOn ? undefined : "differs"}>
                  {send.current.dueOn ? formatShortDate(send.current.dueOn, locale) : "–"}
                </td>
              </tr>
              <tr>
                <th scope="row">{i18n.t("Last step")}</th>
                <td>{lastStep(finding)}</td>
                <td className="differs">{lastStep(send.current)}</td>
              </tr>
            </tbody>
          </table>
        )}
      </Dialog>
    </>
  );
}

/** Who closed it, and that the step was not taken. */
function tooLateText(i18n: I18n, { state, steps }: FindingView): string {
  const name = steps.findLast(({ toState }) => toState === state)?.authorName;
  if (state !== "closed")
    return i18n.t(
      "This can’t be done any more in the state it is in now. Nothing of yours was sent.",
    );
  return name
    ? i18n.t("{name} closed it. Nothing of yours was sent; the lists are brought up to date.", {
        name,
      })
    : i18n.t("The program closed it. Nothing of yours was sent; the lists are brought up to date.");
}

function lastStep({ steps }: FindingView): string {
  const last = steps.at(-1);
  return [last?.authorName, last?.text].filter(Boolean).join(": ") || "–";
}
