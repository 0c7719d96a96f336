import { useLingui } from "@lingui/react";
import { useMemo, useRef, useState } from "react";
import { useNavigate } from "react-router-dom";
import { z } from "zod";
import type { RuleSetVersion } from "../../../shared/acoustics/types";
import { isolate } from "../../../shared/i18n/isolate";
import {
  countVerdicts,
  goalsOf,
  judgeTried,
  MOST_SEARCHED,
  tryChanges,
} from "../../../shared/planning/try-changes";
import { ruleSetVersion } from "../../../shared/rule-sets";
import { PlanChange, type TrySubject } from "../../../shared/schemas/plan";
import { Button } from "../../components/button";
import { Empty } from "../../components/empty";
import { FilterRow, FilterSelect } from "../../components/filter-row";
import { Form, FormActions, SubmitButton, TextField, useSchemaForm } from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { Section } from "../../components/page";
import { Status } from "../../components/status";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useTypedText } from "../../lib/keep-typed";
import { paths } from "../../paths";
import { ChangeForm } from "./change-form";
import { changeSentence } from "./change-words";
import { CountsLine } from "./counts-line";
import { OutcomeTable } from "./outcome-table";
import { useKeepPlan } from "./queries";
import { useFewest } from "./use-fewest";

/** Changes that are tried, and which of them count: one that is left off stays to be put on again. */
const Draft = z.object({
  goal: z.string(),
  changes: z.array(z.object({ change: PlanChange, isOn: z.boolean() })),
});
type Draft = z.infer<typeof Draft>;

export function TryChanges({ subject }: { subject: TrySubject }) {
  const { i18n } = useLingui();
  const governing = ruleSetVersion(subject.ruleSetKey, subject.ruleSetVersion);
  if (subject.workers.length === 0 || !governing)
    return (
      <Empty title={i18n.t("There is no nominal day to try anything on.")}>
        {i18n.t("Give the group a nominal day first, under Rules, Jobs.")}
      </Empty>
    );
  return <Tried_ subject={subject} governing={governing} />;
}

function useDraft(scope: TrySubject["scope"], goals: readonly { id: string }[]) {
  const [text, setText] = useTypedText(`changes ${scope.scopeKind} ${scope.scopeId}`);
  const draft = useMemo((): Draft => {
    const read = Draft.safeParse(text === "" ? null : JSON.parse(text));
    const kept = read.success ? read.data : { goal: "", changes: [] };
    const goal = goals.some(({ id }) => id === kept.goal) ? kept.goal : (goals[0]?.id ?? "");
    return { ...kept, goal };
  }, [text, goals]);
  return [
    draft,
    (next: Draft | null) => setText(next === null ? "" : JSON.stringify(next)),
  ] as const;
}

function Tried_({ subject, governing }: { subject: TrySubject; governing: RuleSetVersion }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const goals = useMemo(() => goalsOf(governing), [governing]);
  const [draft, setDraft] = useDraft(subject.scope, goals);
  const [isAdding, setIsAdding] = useState(false);
  const [said, setSaid] = useState("");
  const addAt = useRef<HTMLDivElement>(null);
  const fewest = useFewest();
  const { changes, goal } = draft;
  const on = useMemo(
    () => changes.filter(({ isOn }) => isOn).map(({ change }) => change),
    [changes],
  );
  const before = useMemo(
    () => judgeTried(tryChanges(subject.workers, [], subject), governing, goal),
    [subject, governing, goal],
  );
  const after = useMemo(
    () => judgeTried(tryChanges(subject.workers, on, subject), governing, goal),
    [subject, governing, goal, on],
  );
  const names = useMemo(
    () =>
      new Map<string, string>([
        ...subject.tasks.map(({ id, name }) => [id, name] as const),
        ...subject.workers.map(({ id, name }) => [id, name] as const),
        ...subject.models.map(({ modelId, name }) => [modelId, name] as const),
      ]),
    [subject],
  );
  const nameOf = (id: string) => names.get(id) ?? i18n.t("(no longer there)");
  const put = (next: Draft) => {
    fewest.stop();
    setSaid("");
    setDraft(next);
  };
  const rows = subject.workers.map(({ id, name, employeeNumber }, index) => ({
    workerId: id,
    workerName: name,
    employeeNumber,
    before: before[index]!,
    after: after[index]!,
  }));

  function findFewest() {
    fewest.start(
      subject.workers,
      changes.map(({ change }) => change),
      subject,
      governing,
      goal,
      ({ chosen, left }) => {
        setDraft({
          goal,
          changes: changes.map((one, place) => ({ ...one, isOn: chosen.includes(place) })),
        });
        setSaid(
          left.length > 0
            ? i18n.t("Even with all of them not everybody is Under: {names}.", {
                names: left.map((id) => isolate(nameOf(id))).join(", "),
              })
            : chosen.length === 0
              ? i18n.t("Everybody is Under without any of them.")
              : i18n.t(
                  "{count, plural, one {# of them is enough, and none fewer would be} other {# of them are enough, and no fewer would be}}: every smaller choice was tried.",
                  { count: chosen.length },
                ),
        );
      },
    );
  }

  const { search } = fewest;
  return (
    <>
      <FilterRow label={i18n.t("What for")}>
        <FilterSelect
          label={i18n.t("Everybody Under")}
          value={goal}
          choices={goals.map(({ id, label }) => ({ value: id, label: i18n._(label) }))}
          onChange={(id) => put({ ...draft, goal: id })}
        />
      </FilterRow>
      <Section title={i18n.t("Changes")} id="changes">
        {changes.length === 0 ? (
          <p className="beneath">
            {i18n.t("None yet. The table below shows the days as they are.")}
          </p>
        ) : (
          <ol className="change-list">
            {changes.map(({ change, isOn }, place) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: a change has no name but its place
              <li key={place}>
                <label className="choice">
                  <input
                    type="checkbox"
                    checked={isOn}
                    onChange={(event) =>
                      put({
                        ...draft,
                        changes: changes.map((one, index) =>
                          index === place ? { ...one, isOn: event.target.checked } : one,
                        ),
                      })
                    }
                  />
                  <span>{changeSentence(i18n, locale, change, nameOf)}</span>
                </label>
                <TextButton
                  onClick={() =>
                    put({ ...draft, changes: changes.filter((_, index) => index !== place) })
                  }
                >
                  {i18n.t("Take out")}
                  <span className="sr-only"> {changeSentence(i18n, locale, change, nameOf)}</span>
                </TextButton>
              </li>
            ))}
          </ol>
        )}
        <div ref={addAt} className="change-add">
          {isAdding ? (
            <ChangeForm
              subject={subject}
              onAdd={(change) => {
                put({ ...draft, changes: [...changes, { change, isOn: true }] });
                setIsAdding(false);
              }}
              onLeave={() => setIsAdding(false)}
            />
          ) : (
            <p className="change-actions">
              <Button onClick={() => setIsAdding(true)}>{i18n.t("Add a change")}</Button>
              {changes.length > 1 && search.state !== "searching" && (
                <Button disabled={changes.length > MOST_SEARCHED} onClick={findFewest}>
                  {i18n.t("Which fewest are enough?")}
                </Button>
              )}
              {search.state === "searching" && (
                <>
                  <progress
                    max={search.of}
                    value={search.done}
                    aria-label={i18n.t("Choices tried")}
                  />
                  <Button onClick={fewest.stop}>{i18n.t("Stop")}</Button>
                </>
              )}
              {changes.length > MOST_SEARCHED && (
                <span className="beneath">
                  {i18n.t("Of at most {count} changes the fewest can be found.", {
                    count: MOST_SEARCHED,
                  })}
                </span>
              )}
            </p>
          )}
        </div>
        <Status>{said}</Status>
      </Section>
      <Section title={i18n.t("What they would do")} id="outcome">
        <CountsLine before={countVerdicts(before)} after={countVerdicts(after)} />
        <OutcomeTable rows={rows} showsSince={false} />
        {subject.withoutDay.length > 0 && (
          <p className="beneath">
            {i18n.t("Without a nominal day, and so not tried: {names}.", {
              names: subject.withoutDay.map(({ name }) => isolate(name)).join(", "),
            })}
          </p>
        )}
        {subject.hasMore && (
          <p className="beneath">
            {i18n.t("The first {count} by name; take a smaller group for the others.", {
              count: subject.workers.length,
            })}
          </p>
        )}
      </Section>
      {on.length > 0 && (
        <Section title={i18n.t("Keep it as a Plan")} id="keep">
          <KeepForm subject={subject} goal={goal} changes={on} onKept={() => setDraft(null)} />
        </Section>
      )}
    </>
  );
}

const KeepFields = z.object({ name: z.string().trim().min(1).max(200) });

function KeepForm({
  subject: { scope },
  goal,
  changes,
  onKept,
}: {
  subject: TrySubject;
  goal: string;
  changes: readonly PlanChange[];
  onKept: () => void;
}) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const keep = useKeepPlan();
  const changeKey = useChangeKey();
  const form = useSchemaForm(KeepFields, { keepAs: "plan", defaultValues: { name: "" } });
  return (
    <Form
      aria-label={i18n.t("Keep it as a Plan")}
      onSubmit={form.handleSubmit(({ name }) => {
        if (keep.isPending) return;
        const { scopeKind, scopeId } = scope;
        const body = { name, scopeKind, scopeId, goal, changes: [...changes] };
        keep.mutate(
          { body, key: changeKey.keyFor(body) },
          {
            onSuccess: ({ id }) => {
              changeKey.forget();
              onKept();
              void navigate(paths.plan(id));
            },
          },
        );
      })}
    >
      <TextField
        form={form}
        name="name"
        label={i18n.t("Name")}
        note={i18n.t(
          "It is computed anew when it is kept, and held against what is measured later.",
        )}
      />
      <FormProblem error={keep.error} />
      <FormActions>
        <SubmitButton isBusy={keep.isPending}>{i18n.t("Keep the Plan")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
