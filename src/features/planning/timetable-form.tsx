import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { get, type UseFormReturn, useFieldArray } from "react-hook-form";
import { useNavigate } from "react-router-dom";
import type { z } from "zod";
import { formatShortDate } from "../../../shared/format/date";
import { formatDose } from "../../../shared/format/dose";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { isolate } from "../../../shared/i18n/isolate";
import { SLOT_MIN } from "../../../shared/planning/timetable";
import {
  MOST_PEOPLE,
  MOST_SLOTS,
  TimetableInput,
  type TimetableSubject,
  type TimetableTaskInput,
} from "../../../shared/schemas/timetable";
import { Button } from "../../components/button";
import {
  Field,
  Form,
  FormActions,
  NumberField,
  SubmitButton,
  showIssuesOn,
  TimeField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { NumberInput } from "../../components/number-input";
import { Section } from "../../components/page";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { timetableQueries, useStartTimetable } from "./timetable-queries";
import { slotTime } from "./timetable-words";

type TheForm = UseFormReturn<z.input<typeof TimetableInput>, unknown, TimetableInput>;

const LEAST_SLOTS = 4;
/** Quiet enough not to add to any dose. */
const QUIET_DB = 60;
const DEFAULT_STAY = 8;

function newTask(taskId: string, slots: number): TimetableTaskInput {
  return {
    taskId,
    staffing: [{ from: 0, to: slots, people: 1 }],
    qualifiedIds: null,
    longestStay: null,
    longestTotal: null,
  };
}

/** What is asked of a timetable for these people. */
export function TimetableForm({ subject }: { subject: TimetableSubject }) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const start = useStartTimetable();
  const changeKey = useChangeKey();
  const { scopeKind, scopeId } = subject.scope;
  const theirs = subject.tasks.filter(
    ({ isTheirs, levelDb, hourPct }) =>
      isTheirs && levelDb !== null && hourPct.some((share) => share !== null),
  );
  const byNoise = theirs.toSorted((a, b) => b.levelDb! - a.levelDb!);
  const quietest = byNoise.at(-1);
  const form = useSchemaForm(TimetableInput, {
    keepAs: `timetable ${scopeKind} ${scopeId}`,
    mode: "onSubmit",
    defaultValues: {
      scopeKind,
      scopeId,
      goal: subject.goal,
      startsAt: subject.startsAt,
      slots: subject.slots,
      mostPct: 100,
      wornPct: null,
      personIds: subject.people.slice(0, MOST_PEOPLE).map(({ id }) => id),
      tasks: byNoise.slice(0, 1).map(({ id }) => ({
        ...newTask(id, subject.slots),
        longestStay: DEFAULT_STAY,
      })),
      restTaskId: byNoise.length > 1 ? (quietest?.id ?? null) : null,
      quietDb: byNoise.length > 1 ? null : QUIET_DB,
    },
  });
  const showIssues = showIssuesOn(form, i18n);
  const wornPct = form.watch("wornPct");
  const known = useQuery(
    timetableQueries.subject(
      { scopeKind, scopeId },
      subject.goal,
      typeof wornPct === "number" && wornPct >= 0 && wornPct <= 100 ? wornPct : null,
    ),
  );
  const shown = known.data ?? subject;
  return (
    <Form
      aria-label={i18n.t("Timetable")}
      onSubmit={form.handleSubmit((input) => {
        if (start.isPending) return;
        const body = { ...input, goal: subject.goal };
        start.mutate(
          { body, key: changeKey.keyFor(body) },
          {
            onSuccess: ({ id }) => {
              changeKey.forget();
              void navigate(paths.timetable(id));
            },
            onError: showIssues,
          },
        );
      })}
    >
      <Section title={i18n.t("The shift")} id="shift">
        <div className="timetable-fields">
          <TimeField form={form} name="startsAt" label={i18n.t("From")} />
          <UntilField form={form} />
          <RestField form={form} subject={shown} />
          <NumberField
            form={form}
            name="mostPct"
            label={i18n.t("Nobody beyond")}
            unit={i18n.t("% of the limit")}
          />
          <NumberField
            form={form}
            name="wornPct"
            label={i18n.t("Protectors worn for")}
            unit={i18n.t("% of a task")}
            isOptional
            note={i18n.t(
              "Only where nothing is on record of how long somebody wears one there. Left empty, such a protector takes nothing off.",
            )}
          />
        </div>
      </Section>
      <Section title={i18n.t("People")} id="people">
        <PeopleField form={form} people={subject.people} />
      </Section>
      <Section title={i18n.t("Tasks")} id="tasks">
        <TaskFields form={form} subject={shown} />
      </Section>
      <FormProblem error={start.error} />
      <FormActions>
        <SubmitButton isBusy={start.isPending}>{i18n.t("Search for a timetable")}</SubmitButton>
      </FormActions>
    </Form>
  );
}

const messageAt = (form: TheForm, path: string): string | undefined => {
  const found =
    get(form.formState.errors, `${path}.message`) ??
    get(form.formState.errors, `${path}.root.message`);
  return typeof found === "string" ? found : undefined;
};

/** Slots as times of day, one after the other. */
function SlotChoices({ startsAt, from, to }: { startsAt: string; from: number; to: number }) {
  const slots = Array.from({ length: Math.max(0, to - from + 1) }, (_, index) => from + index);
  return slots.map((slot) => (
    <option key={slot} value={slot}>
      {slotTime(startsAt, slot)}
    </option>
  ));
}

const startOf = (form: TheForm): string => {
  const startsAt: unknown = form.watch("startsAt");
  return typeof startsAt === "string" && /^\d\d:\d\d$/.test(startsAt) ? startsAt : "00:00";
};

function UntilField({ form }: { form: TheForm }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const slots = form.watch("slots");
  return (
    <Field
      label={i18n.t("Until")}
      unit={formatDuration(slots * SLOT_MIN, locale)}
      error={messageAt(form, "slots")}
    >
      {({ readOnly: _, ...wires }) => (
        <select
          {...wires}
          className="input"
          value={slots}
          onChange={(event) => {
            const next = Number(event.target.value);
            // What went on to the end of the shift goes on to its new end.
            for (const [index, task] of form.getValues("tasks").entries())
              form.setValue(
                `tasks.${index}.staffing`,
                task.staffing.map((line) => (line.to === slots ? { ...line, to: next } : line)),
              );
            form.setValue("slots", next, { shouldDirty: true });
          }}
        >
          <SlotChoices startsAt={startOf(form)} from={LEAST_SLOTS} to={MOST_SLOTS} />
        </select>
      )}
    </Field>
  );
}

const QUIET = "quiet";

function RestField({ form, subject }: { form: TheForm; subject: TimetableSubject }) {
  const { i18n } = useLingui();
  const restTaskId = form.watch("restTaskId");
  const fault = messageAt(form, "restTaskId") ?? messageAt(form, "quietDb");
  return (
    <Field
      label={i18n.t("Time at none of the tasks")}
      error={fault}
      unit={
        restTaskId === null && (
          <>
            <NumberInput
              aria-label={i18n.t("Level of the quiet, dB")}
              value={form.watch("quietDb")}
              onValue={(value) => form.setValue("quietDb", value as number, { shouldDirty: true })}
            />{" "}
            dB
          </>
        )
      }
    >
      {({ readOnly: _, ...wires }) => (
        <select
          {...wires}
          className="input"
          value={restTaskId ?? QUIET}
          onChange={(event) => {
            const isQuiet = event.target.value === QUIET;
            form.setValue("restTaskId", isQuiet ? null : event.target.value, { shouldDirty: true });
            form.setValue("quietDb", isQuiet ? QUIET_DB : null, { shouldDirty: true });
          }}
        >
          <option value={QUIET}>{i18n.t("in quiet, of a level")}</option>
          {subject.tasks
            .filter(({ levelDb }) => levelDb !== null)
            .map(({ id, name }) => (
              <option key={id} value={id}>
                {name}
              </option>
            ))}
        </select>
      )}
    </Field>
  );
}

function PeopleField({ form, people }: { form: TheForm; people: TimetableSubject["people"] }) {
  const { i18n } = useLingui();
  const chosen = form.watch("personIds");
  return (
    <Field
      label={i18n.t("In the timetable")}
      isGroup
      error={
        messageAt(form, "personIds") ??
        (get(form.formState.errors, "personIds")
          ? i18n.t("Choose at least one person.")
          : undefined)
      }
      note={
        people.length > MOST_PEOPLE
          ? i18n.t("At most {count} people at a time.", { count: MOST_PEOPLE })
          : undefined
      }
    >
      {() => (
        <PersonChecks
          people={people}
          isOn={(id) => chosen.includes(id)}
          onToggle={(id) =>
            form.setValue(
              "personIds",
              people.map((one) => one.id).filter((one) => chosen.includes(one) !== (one === id)),
              { shouldDirty: true, shouldValidate: form.formState.isSubmitted },
            )
          }
        />
      )}
    </Field>
  );
}

function PersonChecks({
  people,
  isOn,
  onToggle,
}: {
  people: TimetableSubject["people"];
  isOn: (id: string) => boolean;
  onToggle: (id: string) => void;
}) {
  return (
    <div className="person-checks">
      {people.map(({ id, name }) => (
        <label key={id} className="choice">
          <input type="checkbox" checked={isOn(id)} onChange={() => onToggle(id)} />
          <span>{isolate(name)}</span>
        </label>
      ))}
    </div>
  );
}

function TaskFields({ form, subject }: { form: TheForm; subject: TimetableSubject }) {
  const { i18n } = useLingui();
  const { fields, append, remove } = useFieldArray({ control: form.control, name: "tasks" });
  const rows = form.watch("tasks");
  const taken = new Set([...rows.map(({ taskId }) => taskId), form.watch("restTaskId")]);
  const free = subject.tasks.filter(({ id }) => !taken.has(id));
  const next =
    free.find(({ isTheirs, levelDb }) => isTheirs && levelDb !== null) ??
    free.find(({ levelDb }) => levelDb !== null) ??
    free[0];
  return (
    <>
      <ol className="timetable-tasks">
        {fields.map((field, index) => (
          <li key={field.id}>
            <TaskField form={form} subject={subject} index={index} onRemove={() => remove(index)} />
          </li>
        ))}
      </ol>
      {fields.length === 0 && (
        <p className="field-error" role="status">
          {i18n.t("A timetable needs a task.")}
        </p>
      )}
      {next && (
        <p className="mt-3">
          <Button onClick={() => append(newTask(next.id, form.getValues("slots")))}>
            {i18n.t("Add a task")}
          </Button>
        </p>
      )}
    </>
  );
}

function TaskField({
  form,
  subject,
  index,
  onRemove,
}: {
  form: TheForm;
  subject: TimetableSubject;
  index: number;
  onRemove: () => void;
}) {
  const { i18n } = useLingui();
  const [isOpen, setIsOpen] = useState(false);
  const row = form.watch(`tasks.${index}`);
  const slots = form.watch("slots");
  const startsAt = startOf(form);
  const task = subject.tasks.find(({ id }) => id === row.taskId);
  const people = subject.people.filter(({ id }) => form.watch("personIds").includes(id));
  const name = task?.name ?? i18n.t("Task {number}", { number: index + 1 });
  const at = `tasks.${index}` as const;
  const setRow = (change: Partial<TimetableTaskInput>) =>
    form.setValue(
      at,
      { ...row, ...change },
      { shouldDirty: true, shouldValidate: form.formState.isSubmitted },
    );
  const setLine = (line: number, change: Partial<TimetableTaskInput["staffing"][number]>) =>
    setRow({
      staffing: row.staffing.map((one, place) => (place === line ? { ...one, ...change } : one)),
    });
  const last = row.staffing.at(-1);
  const may = row.qualifiedIds && people.filter(({ id }) => row.qualifiedIds?.includes(id));
  const qualifiedFault =
    messageAt(form, `${at}.qualifiedIds`) ??
    (may?.length === 0
      ? i18n.t("Nobody may do this task: say who is qualified, or take the task out.")
      : undefined);
  return (
    // biome-ignore lint/a11y/useSemanticElements: a fieldset can't be a grid of label and controls in every browser
    <div role="group" aria-label={name}>
      <p className="timetable-task-head">
        <select
          className="input"
          aria-label={i18n.t("Task {number}", { number: index + 1 })}
          aria-invalid={messageAt(form, `${at}.taskId`) ? true : undefined}
          value={row.taskId}
          onChange={(event) => setRow({ taskId: event.target.value })}
        >
          {subject.tasks.map(({ id, name: label }) => (
            <option key={id} value={id}>
              {label}
            </option>
          ))}
        </select>
        <TextButton aria-label={i18n.t("Take {task} out", { task: name })} onClick={onRemove}>
          {i18n.t("Take out")}
        </TextButton>
      </p>
      <p className="beneath">{task && <TaskNoise task={task} people={subject.people} />}</p>
      <Fault text={messageAt(form, `${at}.taskId`)} />
      {row.staffing.map((line, place) => {
        const fault = ["to", "from", "people"]
          .map((field) => messageAt(form, `${at}.staffing.${place}.${field}`))
          .find(Boolean);
        return (
          // biome-ignore lint/suspicious/noArrayIndexKey: a line has no name but its place
          <div key={place} className="timetable-line">
            <NumberInput
              aria-label={i18n.t("People at {task}, {line}", { task: name, line: place + 1 })}
              aria-invalid={fault ? true : undefined}
              value={line.people}
              onValue={(value) => setLine(place, { people: value as number })}
            />
            <span>{i18n.t("at a time, from")}</span>
            <select
              className="input"
              aria-label={i18n.t("{task}, {line}: from", { task: name, line: place + 1 })}
              value={line.from}
              onChange={(event) => setLine(place, { from: Number(event.target.value) })}
            >
              <SlotChoices startsAt={startsAt} from={0} to={slots - 1} />
            </select>
            <span>{i18n.t("until")}</span>
            <select
              className="input"
              aria-label={i18n.t("{task}, {line}: until", { task: name, line: place + 1 })}
              value={line.to}
              onChange={(event) => setLine(place, { to: Number(event.target.value) })}
            >
              <SlotChoices startsAt={startsAt} from={1} to={slots} />
              {line.to > slots && <option value={line.to}>{slotTime(startsAt, line.to)}</option>}
            </select>
            {row.staffing.length > 1 && (
              <TextButton
                aria-label={i18n.t("Take time {line} of {task} out", {
                  task: name,
                  line: place + 1,
                })}
                onClick={() => setRow({ staffing: row.staffing.filter((_, one) => one !== place) })}
              >
                {i18n.t("Take out")}
              </TextButton>
            )}
            <Fault text={fault} />
          </div>
        );
      })}
      {last && last.to < slots && row.staffing.length < 6 && (
        <p>
          <TextButton
            onClick={() =>
              setRow({ staffing: [...row.staffing, { from: last.to, to: slots, people: 1 }] })
            }
          >
            {i18n.t("Another time")}
            <span className="sr-only"> {name}</span>
          </TextButton>
        </p>
      )}
      <p className="timetable-line">
        <LongestSelect
          label={i18n.t("Longest in one go")}
          task={name}
          slots={slots}
          value={row.longestStay}
          onChange={(longestStay) => setRow({ longestStay })}
        />
        <LongestSelect
          label={i18n.t("Longest in a day")}
          task={name}
          slots={slots}
          value={row.longestTotal}
          onChange={(longestTotal) => setRow({ longestTotal })}
        />
      </p>
      <p>
        {may === null
          ? i18n.t("Everybody may do it.")
          : i18n.t("May do it: {count} of {all}.", { count: may.length, all: people.length })}{" "}
        <TextButton aria-expanded={isOpen} onClick={() => setIsOpen(!isOpen)}>
          {i18n.t("Who may")}
          <span className="sr-only"> {name}</span>
        </TextButton>
      </p>
      <Fault text={qualifiedFault} />
      {isOpen && (
        // biome-ignore lint/a11y/useSemanticElements: as above
        <div role="group" aria-label={i18n.t("Who may do {task}", { task: name })}>
          <PersonChecks
            people={people}
            isOn={(id) => row.qualifiedIds?.includes(id) ?? true}
            onToggle={(id) => {
              const ids = people.map((one) => one.id);
              const on = ids.filter(
                (one) => (row.qualifiedIds?.includes(one) ?? true) !== (one === id),
              );
              setRow({ qualifiedIds: on.length === ids.length ? null : on });
            }}
          />
        </div>
      )}
    </div>
  );
}

const Fault = ({ text }: { text: string | undefined }) =>
  text ? <span className="field-error block">{text}</span> : null;

function LongestSelect({
  label,
  task,
  slots,
  value,
  onChange,
}: {
  label: string;
  task: string;
  slots: number;
  value: number | null;
  onChange: (value: number | null) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <label>
      {label} <span className="sr-only">{task}</span>
      <select
        className="input"
        value={value ?? ""}
        onChange={(event) =>
          onChange(event.target.value === "" ? null : Number(event.target.value))
        }
      >
        <option value="">{i18n.t("no limit")}</option>
        {Array.from({ length: Math.max(slots, value ?? 0) }, (_, index) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: a length is its place
          <option key={index} value={index + 1}>
            {formatDuration((index + 1) * SLOT_MIN, locale)}
          </option>
        ))}
      </select>
    </label>
  );
}

/** A task's noise, and what an hour of it takes of the limit of the one who takes least and of the one who takes most. */
function TaskNoise({
  task: { levelDb, levelFrom, hourPct, isUpper },
  people,
}: {
  task: TimetableSubject["tasks"][number];
  people: TimetableSubject["people"];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (levelDb === null) return i18n.t("Not measured: nobody can be put there.");
  const known = hourPct.filter((pct) => pct !== null);
  const unknown = people.filter((_, person) => hourPct[person] === null);
  const level =
    levelFrom === null
      ? i18n.t("{level} dB", { level: formatLevel(levelDb, locale) })
      : i18n.t("{level} dB since {date}", {
          level: formatLevel(levelDb, locale),
          date: formatShortDate(levelFrom, locale),
        });
  const least = formatDose(Math.min(...known), locale);
  const most = formatDose(Math.max(...known), locale);
  return [
    level,
    known.length > 0 &&
      (least === most
        ? i18n.t("an hour takes {share} of the limit", { share: most })
        : i18n.t("an hour takes {least} to {most} of the limit, by person", { least, most })),
    isUpper && i18n.t("these are upper bounds"),
    unknown.length > 0 &&
      i18n.t("not known, and so not put there: {names}", {
        names: unknown.map(({ name }) => isolate(name)).join(", "),
      }),
  ]
    .filter(Boolean)
    .join("; ");
}
