import { useLingui } from "@lingui/react";
import { useEffect, useRef } from "react";
import { z } from "zod";
import { Reason } from "../../../shared/schemas/common";
import { Button } from "../../components/button";
import {
  type Choice,
  Form,
  FormActions,
  RadioGroup,
  SelectField,
  SubmitButton,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { clockText, editClock, type HistoryClock, readClock } from "./history-clock";
import type { Span } from "./history-span";
import { type Drawn, overlapOf, type StretchKind } from "./history-stretches";
import { rangeText, stretchName } from "./history-words";

const SHORTEST_REASON = 3;
const StretchFields = z
  .object({
    kind: z.enum(["task", "left-out"]),
    taskId: z.string().nullable(),
    reason: z.string().nullable(),
    from: z.string().min(1),
    to: z.string().min(1),
    /** Which of the two, where the clock showed a time twice. */
    fromTurn: z.enum(["first", "second"]),
    toTurn: z.enum(["first", "second"]),
  })
  .check((context) => {
    const { kind, taskId, reason } = context.value;
    const given = kind === "task" ? taskId : reason;
    const isMissing = given === null || given.trim() === "";
    const isShort = kind === "left-out" && !isMissing && !Reason.safeParse(reason).success;
    if (isMissing || isShort)
      context.issues.push({
        code: "custom",
        input: context.value,
        path: [kind === "task" ? "taskId" : "reason"],
        params: isShort
          ? { code: "too_small", origin: "string", minimum: SHORTEST_REASON }
          : { code: "required" },
      });
  });

export interface FormStretch extends Span {
  readonly kind: StretchKind;
  readonly taskId: string | null;
  readonly reason: string | null;
  /** Null: not drawn yet. */
  readonly key: string | null;
}

/** A bracket by typing: its task or why it is left out, from and to by the site's clock. */
export function StretchForm({
  stretch,
  clock,
  drawn,
  tasks,
  taskNames,
  onSet,
  onRemove,
  onClose,
}: {
  stretch: FormStretch;
  clock: HistoryClock;
  drawn: readonly Drawn[];
  tasks: readonly Choice[];
  taskNames: Readonly<Record<string, string>>;
  onSet: (stretch: FormStretch) => void;
  onRemove: (() => void) | null;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const section = useRef<HTMLElement>(null);
  const head = useRef<HTMLHeadingElement>(null);
  const { fromS, toS } = stretch;
  const turnOf = (text: string, atS: number): "first" | "second" => {
    const read = readClock(clock, text);
    return read.kind === "at" && read.atS.findIndex((one) => Math.abs(one - atS) < 60) === 1
      ? "second"
      : "first";
  };
  const written = { from: editClock(clock, fromS), to: editClock(clock, toS) };
  const form = useSchemaForm(StretchFields, {
    mode: "onSubmit",
    keepAs: `${fromS} ${toS}`,
    defaultValues: {
      kind: stretch.kind,
      taskId: stretch.taskId,
      reason: stretch.reason,
      ...written,
      fromTurn: turnOf(written.from, fromS),
      toTurn: turnOf(written.to, toS),
    },
  });
  useEffect(() => {
    // No further than the form needs: what is being typed about stands right over it.
    head.current?.focus({ preventScroll: true });
    section.current?.scrollIntoView?.({ block: "nearest" });
  }, []);
  const kind = form.watch("kind");

  const turns = (text: string): Choice[] | null => {
    const read = readClock(clock, text);
    if (read.kind !== "at" || read.atS.length < 2) return null;
    return [
      { value: "first", label: i18n.t("the first, before the clock went back") },
      { value: "second", label: i18n.t("the second, after it") },
    ];
  };
  const fromTurns = turns(form.watch("from"));
  const toTurns = turns(form.watch("to"));

  function readTime(name: "from" | "to", text: string, turn: "first" | "second"): number | null {
    // A time that nobody touched keeps what the clock does not show.
    if (text === written[name] && turn === turnOf(text, stretch[`${name}S`]))
      return stretch[`${name}S`];
    const read = readClock(clock, text);
    if (read.kind === "at") return read.atS[turn === "second" ? 1 : 0] ?? read.atS[0];
    form.setError(
      name,
      {
        message:
          read.kind === "unreadable"
            ? i18n.t("A time is needed, as 07:30 or 07:30:15.")
            : i18n.t("The history lasts from {from} to {to}.", {
                from: clockText(clock, 0, true),
                to: clockText(clock, clock.lengthS, true),
              }),
      },
      { shouldFocus: true },
    );
    return null;
  }

  const submit = form.handleSubmit((values) => {
    const from = readTime("from", values.from, values.fromTurn);
    const to = from === null ? null : readTime("to", values.to, values.toTurn);
    if (from === null || to === null) return;
    if (to <= from) {
      form.setError("to", { message: i18n.t("It ends before it starts.") }, { shouldFocus: true });
      return;
    }
    const set: FormStretch = {
      kind: values.kind,
      taskId: values.kind === "task" ? values.taskId : null,
      reason: values.kind === "left-out" ? values.reason : null,
      fromS: from,
      toS: to,
      key: stretch.key,
    };
    const over = overlapOf(drawn, set, stretch.key);
    if (over) {
      form.setError(
        "from",
        {
          message: i18n.t("It would lie over {name}, {range}. Shorten one of the two.", {
            name: stretchName(i18n, over, taskNames),
            range: rangeText(clock, over),
          }),
        },
        { shouldFocus: true },
      );
      return;
    }
    onSet(set);
  });

  return (
    <section className="stretch-form" ref={section}>
      <h2 tabIndex={-1} ref={head}>
        {stretch.key === null ? i18n.t("A new bracket") : i18n.t("This bracket")}
      </h2>
      <Form
        aria-label={i18n.t("Bracket under the time history")}
        onSubmit={submit}
        onKeyDown={(event) => {
          if (event.key === "Escape") onClose();
        }}
      >
        <RadioGroup
          form={form}
          name="kind"
          label={i18n.t("This time is")}
          choices={[
            { value: "task", label: i18n.t("Counted, as a task") },
            { value: "left-out", label: i18n.t("Left out, because…") },
          ]}
        />
        {kind === "task" ? (
          <SelectField
            form={form}
            name="taskId"
            label={i18n.t("Task")}
            choices={tasks}
            emptyLabel={i18n.t("Choose a task")}
          />
        ) : (
          <TextField
            form={form}
            name="reason"
            label={i18n.t("Left out, because")}
            note={i18n.t("A knocked microphone, say. The reason stands wherever the result does.")}
          />
        )}
        <TextField
          form={form}
          name="from"
          label={i18n.t("From")}
          note={i18n.t("By the clock of the site; seconds may follow.")}
          inputProps={{ className: "input is-time", autoComplete: "off" }}
        />
        {fromTurns && (
          <RadioGroup
            form={form}
            name="fromTurn"
            label={i18n.t("The clock showed that twice")}
            choices={fromTurns}
          />
        )}
        <TextField
          form={form}
          name="to"
          label={i18n.t("To")}
          inputProps={{ className: "input is-time", autoComplete: "off" }}
        />
        {toTurns && (
          <RadioGroup
            form={form}
            name="toTurn"
            label={i18n.t("The clock showed that twice")}
            choices={toTurns}
          />
        )}
        <FormActions>
          <SubmitButton>{stretch.key === null ? i18n.t("Draw it") : i18n.t("Set it")}</SubmitButton>
          <Button onClick={onClose}>{i18n.t("Leave it")}</Button>
          {onRemove && <Button onClick={onRemove}>{i18n.t("Remove it")}</Button>}
        </FormActions>
      </Form>
    </section>
  );
}
