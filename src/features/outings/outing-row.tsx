import { useLingui } from "@lingui/react";
import { type KeyboardEvent, type Ref, useImperativeHandle, useRef, useState } from "react";
import { useController } from "react-hook-form";
import { z } from "zod";
import { formatDayMonth, formatShortDate, formatTime } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { parseNumber } from "../../../shared/format/number";
import { issueText } from "../../../shared/problems/issue-text";
import {
  isLateReturn,
  LAEQ_SETTINGS,
  LONG_OUTING_MIN,
  type OutingReturn,
  type OutingStart,
  type OutingRow as Row,
} from "../../../shared/schemas/outing";
import { RunView } from "../../../shared/schemas/run";
import { localDate } from "../../../shared/time/zone";
import { settingsWords } from "../../../shared/words/register-words";
import { Button } from "../../components/button";
import { ComboboxField } from "../../components/combobox-field";
import {
  type Choice,
  NumberField,
  SelectField,
  TextAreaField,
  TextField,
  TimeField,
  useSchemaForm,
} from "../../components/form";
import { TextButton, TextLink } from "../../components/link";
import { ApiError } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { problemText } from "../../lib/problem-text";
import { searchWorkers } from "../../lib/references";
import { paths } from "../../paths";
import { type Ask, OutingAsk } from "./outing-ask";
import { overlapOf } from "./overlap";
import { useEndOuting, useStartOuting, useUndoOuting } from "./queries";
import {
  backInstant,
  type Cell,
  cellsOf,
  enterStep,
  type Figure,
  type FoundInstant,
  outInstant,
  phaseOf,
  presentTime,
  readingsOf,
} from "./row-keys";

const check = z.number().min(70).max(130).nullable();

const RowFields = z.object({
  who: z.string().nullable(),
  checkBeforeDb: check,
  outTime: z.string().nullable(),
  backTime: z.string().nullable(),
  checkAfterDb: check,
  figures: z.array(z.string()),
  peakDb: z.number().min(40).max(200).nullable(),
  covers: z.enum(["shift", "projected", "part"]),
  isClipped: z.boolean(),
  isUnderRange: z.boolean(),
  unusual: z.string().nullable(),
});
type RowValues = z.infer<typeof RowFields>;
type FieldName = keyof RowValues | `figures.${number}`;

const fieldOf = (cell: Cell): FieldName =>
  cell.startsWith("figure") ? `figures.${Number(cell.slice(6))}` : (cell as keyof RowValues);
const cellOf = (name: string): Cell => name.replace("figures.", "figure") as Cell;

/** Issues of the server stand at the cell that they are about. */
const CELL_OF_ISSUE: Readonly<Record<string, FieldName>> = {
  outAt: "outTime",
  backAt: "backTime",
  "back.backAt": "backTime",
  workerId: "who",
  areaId: "who",
  checkBeforeDb: "checkBeforeDb",
  checkAfterDb: "checkAfterDb",
};

export interface OutingRowHandle {
  /** Where typing goes on in this row. */
  focus(): void;
}

/** What was answered in a row on the way to being sent. */
type Back = NonNullable<OutingStart["back"]>;

interface Answers {
  outInstant?: string;
  backInstant?: string;
  wasWornUntilThen?: boolean;
  covers?: Back["covers"];
  keptReason?: string;
  discardReason?: string;
}

/** One instrument: with whom it goes out, and what it brings back. A form of its own, sent with Enter. */
export function OutingRow({
  row,
  date,
  isPast,
  timeZone,
  surveyId,
  canChange,
  searchPlaces,
  onDone,
  onShowAnew,
  ref,
}: {
  row: Row;
  date: string;
  /** The page is of a day gone by: what went out that day has come back since. */
  isPast: boolean;
  timeZone: string;
  surveyId: string | null;
  canChange: boolean;
  searchPlaces: (text: string) => readonly Choice[];
  onDone: (message: string) => void;
  onShowAnew: () => void;
  ref: Ref<OutingRowHandle>;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [ask, setAsk] = useState<Ask | null>(null);
  const [goesOutAgain, setGoesOutAgain] = useState(false);
  const stamped = useRef<{ time: string; instant: string } | null>(null);
  const answers = useRef<Answers>({});
  const changeKey = useChangeKey();
  const start = useStartOuting();
  const end = useEndOuting();
  const undo = useUndoOuting();
  const form = useSchemaForm(RowFields, {
    mode: "onSubmit",
    keepAs: `${row.instrumentId} ${row.run?.id ?? date}`,
    defaultValues: emptyRow(row),
  });
  const { run } = row;
  const presets = presetsOf(row);
  const phase = phaseOf(row, isPast);
  const isBack = run !== null && !run.isOut && !goesOutAgain;
  const whoField = useController({ control: form.control, name: "who" });
  const isBusy = start.isPending || end.isPending || undo.isPending;
  const time = (instant: string | null) =>
    instant === null
      ? "–"
      : localDate(new Date(instant), timeZone) === date
        ? formatTime(instant, timeZone)
        : `${formatDayMonth(localDate(new Date(instant), timeZone), locale)}, ${formatTime(instant, timeZone)}`;

  const go = (cell: Cell) => form.setFocus(fieldOf(cell) as keyof RowValues);
  useImperativeHandle(ref, () => ({
    focus() {
      if (!canChange) return;
      setGoesOutAgain(true);
      const cells = cellsOf(phase, presets.length);
      const isEmptyCell = (cell: Cell) => {
        const value = form.getValues(fieldOf(cell) as keyof RowValues);
        return value === null || value === "";
      };
      // After the render that shows the cells of a row that was back already.
      requestAnimationFrame(() => go(cells.find(isEmptyCell) ?? (cells[0] as Cell)));
    },
  }));

  function stamp(cell: "outTime" | "backTime") {
    const now = presentTime(new Date(), timeZone);
    stamped.current = now;
    form.setValue(cell, now.time);
    // In the morning the time is the last that is wanted; in the evening figures follow.
    if (cell === "outTime") void submit();
    else go(cellsOf("back", presets.length)[1] as Cell);
  }

  function onKeyDown(event: KeyboardEvent<HTMLFormElement>) {
    const { target } = event;
    if (event.key !== "Enter" || event.defaultPrevented) return;
    if (!(target instanceof HTMLInputElement) || target.type === "checkbox" || !target.name) return;
    event.preventDefault();
    const step = enterStep(cellOf(target.name), {
      phase,
      presetsCount: presets.length,
      isEmpty: target.value.trim() === "",
    });
    if (step.kind === "stamp") stamp(step.cell);
    else if (step.kind === "go") go(step.to);
    else void submit();
  }

  /** The instant of a typed time; null where it has to be asked about or mended first. */
  function readInstant(
    cell: "outTime" | "backTime",
    values: RowValues,
    outAt: string | null,
  ): string | null {
    const answered = answers.current[cell === "outTime" ? "outInstant" : "backInstant"];
    if (answered) return answered;
    const typed = values[cell];
    if (typed === null) {
      form.setError(cell, {
        message:
          phase === "both"
            ? i18n.t("Type the time of that day.")
            : i18n.t("Enter stamps the present time."),
      });
      go(cell);
      return null;
    }
    if (stamped.current?.time === typed) return stamped.current.instant;
    const found: FoundInstant =
      cell === "outTime"
        ? outInstant(date, typed, timeZone)
        : backInstant(outAt ?? "", typed, timeZone);
    if (found.kind === "one") return found.instant;
    if (found.kind === "twice") setAsk({ ...found, cell, time: typed });
    else {
      form.setError(cell, {
        message: i18n.t("The clock was set forward: this time never came that day."),
      });
      go(cell);
    }
    return null;
  }

  const readFigure = (text: string) => parseNumber(text.replace("%", ""), locale);

  function onFigureLeft(name: string, text: string) {
    if (!name.startsWith("figures.")) return;
    const field = name as `figures.${number}`;
    const { kind } = readFigure(text);
    if (kind === "ok" || kind === "empty") form.clearErrors(field);
    else form.setError(field, { message: i18n.t("A level in dB, or a dose with %.") });
  }

  function readFigures(texts: readonly string[]): (Figure | null)[] | null {
    const found = texts.map((text) => {
      const isDose = text.trim().endsWith("%");
      const parsed = readFigure(text);
      if (parsed.kind === "empty") return null;
      if (parsed.kind !== "ok") return undefined;
      return isDose
        ? ({ kind: "dose", dosePct: parsed.value } as const)
        : ({ kind: "average", averageDb: parsed.value } as const);
    });
    const wrong = found.indexOf(undefined);
    if (wrong < 0) return found as (Figure | null)[];
    form.setError(`figures.${wrong}`, { message: i18n.t("A level in dB, or a dose with %.") });
    form.setFocus(`figures.${wrong}`);
    return null;
  }

  /** What was answered belongs to what was sent then: a row that is sent by itself is asked about anew. */
  function submit(more: Answers | null = null) {
    answers.current = more === null ? {} : { ...answers.current, ...more };
    return form.handleSubmit((values) => {
      if (isBusy) return;
      setAsk(null);
      if (phase === "back") sendBack(values);
      else sendOut(values);
    })();
  }

  function sendOut(values: RowValues) {
    const [kind, id] = (values.who ?? "").split(" ");
    if (!id) {
      form.setError("who", { message: i18n.t("A worker, or a place.") });
      go("who");
      return;
    }
    const outAt = readInstant("outTime", values, null);
    if (outAt === null) return;
    const back = phase === "both" ? readBack(values, outAt) : null;
    if (phase === "both" && back === null) return;
    const body: OutingStart = {
      instrumentId: row.instrumentId,
      workerId: kind === "worker" ? id : null,
      areaId: kind === "area" ? id : null,
      surveyId: row.reservedFor?.surveyId ?? surveyId,
      date,
      outAt,
      checkBeforeDb: values.checkBeforeDb,
      keptReason: answers.current.keptReason ?? null,
      // A place has no shift that its reading could cover.
      back: back && kind === "area" ? { ...back, covers: "part" } : back,
    };
    start.mutate(
      { body, key: changeKey.keyFor(body) },
      {
        onSuccess: (saved) =>
          done(
            saved.isOut
              ? i18n.t("{serial} is out with {name}.", {
                  serial: row.serialNumber,
                  name: saved.workerName ?? saved.areaName ?? "",
                })
              : i18n.t("The run of {serial} is recorded.", { serial: row.serialNumber }),
          ),
        onError: show,
      },
    );
  }

  /** What a return says; null where something has to be asked about or mended first. */
  function readBack(values: RowValues, outAt: string): Back | null {
    const backAt = readInstant("backTime", values, outAt);
    if (backAt === null) return null;
    const outForMin = (Date.parse(backAt) - Date.parse(outAt)) / 60_000;
    const isTyped = stamped.current?.time !== values.backTime;
    if (isTyped && outForMin > LONG_OUTING_MIN && !answers.current.wasWornUntilThen) {
      setAsk({ kind: "long", backAt, outForMin });
      return null;
    }
    const expectedBackAt = run?.isOut ? run.expectedBackAt : null;
    if (
      expectedBackAt &&
      isLateReturn(backAt, expectedBackAt) &&
      !answers.current.wasWornUntilThen
    ) {
      setAsk({ kind: "late", backAt, expectedBackAt });
      return null;
    }
    const figures = readFigures(values.figures);
    if (figures === null) return null;
    return {
      backAt,
      checkAfterDb: values.checkAfterDb,
      covers: answers.current.covers ?? values.covers,
      readings: readingsOf(presets, figures, values.peakDb),
      doubts: [
        ...(values.isClipped ? (["clipped"] as const) : []),
        ...(values.isUnderRange ? (["under-range"] as const) : []),
      ],
      keptReason: answers.current.keptReason ?? null,
      unusual: values.unusual?.trim() ? values.unusual : null,
    };
  }

  function sendBack(values: RowValues) {
    if (!run) return;
    const back = readBack(values, run.outAt ?? "");
    if (back === null) return;
    const body: OutingReturn = { ...back, discardReason: answers.current.discardReason ?? null };
    end.mutate(
      { runId: run.id, revision: run.revision, body, key: changeKey.keyFor(body) },
      {
        onSuccess: (saved) =>
          done(
            saved.isVoid
              ? i18n.t("{serial} is back; its run is discarded.", { serial: row.serialNumber })
              : i18n.t("{serial} is back.", { serial: row.serialNumber }),
          ),
        onError: show,
      },
    );
  }

  function done(message: string) {
    answers.current = {};
    stamped.current = null;
    changeKey.forget();
    setGoesOutAgain(false);
    form.reset(emptyRow(row));
    onDone(message);
  }

  function show(error: unknown) {
    if (!(error instanceof ApiError)) {
      setAsk({ kind: "problem", text: problemText(i18n, error) });
      return;
    }
    if (error.code === "already-out") {
      const { withName, authorName, outAt } = error.params;
      setAsk({
        kind: "met",
        text: i18n.t("{author} sent it out at {time}, with {name}.", {
          author: String(authorName),
          time: formatTime(String(outAt), timeZone),
          name: String(withName),
        }),
      });
      return;
    }
    const current = RunView.safeParse((error.body as { current?: unknown } | null)?.current);
    if (error.status === 412 && current.success) {
      const { authorName, backAt, isVoid } = current.data;
      const author = authorName ?? "";
      setAsk({
        kind: "met",
        text: isVoid
          ? i18n.t("{author} took it back meanwhile: the run is struck.", { author })
          : backAt
            ? i18n.t("{author} has written it back already, at {time}.", {
                author,
                time: formatTime(backAt, timeZone),
              })
            : i18n.t("{author} has changed this run meanwhile.", { author }),
      });
      return;
    }
    const overlap = overlapOf(error);
    if (overlap) {
      setAsk({ kind: "overlap", ...overlap });
      return;
    }
    const doubts = error.issues.filter(({ path }) => path === "keptReason");
    if (doubts.length > 0) {
      setAsk({ kind: "doubts", doubts, canDiscard: phase === "back" });
      return;
    }
    const [issue] = error.issues;
    const field = issue && CELL_OF_ISSUE[issue.path];
    if (issue && field) {
      answers.current = {};
      form.setError(field, { message: issueText(i18n, issue) }, { shouldFocus: true });
    } else
      setAsk({
        kind: "problem",
        text: issue ? issueText(i18n, issue) : problemText(i18n, error),
      });
  }

  const title = `${row.name}, ${row.serialNumber}`;
  const isOverdue = row.calibrationDueOn !== null && row.calibrationDueOn < date;
  const name = run && (run.workerName ?? run.areaName);
  const figureLabel = (index: number) => {
    const settings = presets[index];
    if (!settings) return "";
    return settings.exchangeRateDb === 3 && settings.thresholdDb === null
      ? i18n.t("LAeq")
      : i18n.t("{rate} dB, {threshold}", {
          rate: settings.exchangeRateDb,
          threshold: settings.thresholdDb ?? i18n.t("no threshold"),
        });
  };
  const isTypedOut = phase !== "back" && !isBack && canChange;
  const isTypedBack = canChange && (phase === "back" || (phase === "both" && !isBack));
  const sendOutAct = (
    <div className="outing-cell is-act">
      <Button type="submit" isBusy={isBusy}>
        {phase === "both" ? i18n.t("Record the run") : i18n.t("Send out")}
      </Button>
      {goesOutAgain && run && (
        <TextButton onClick={() => setGoesOutAgain(false)}>{i18n.t("Leave it")}</TextButton>
      )}
    </div>
  );
  return (
    <li className={`outing${run?.isOut ? " is-out" : ""}`}>
      <form
        aria-label={title}
        className="outing-cells"
        noValidate
        onKeyDown={onKeyDown}
        onBlur={({ target }) => {
          if (target instanceof HTMLInputElement) onFigureLeft(target.name, target.value);
        }}
        onSubmit={(event) => {
          event.preventDefault();
          void submit();
        }}
      >
        <div className="outing-cell is-instrument">
          <TextLink className="is-quiet mono" to={paths.instrument(row.instrumentId)}>
            {row.serialNumber}
          </TextLink>
          <span className="beneath">
            {row.name}
            {row.reservedFor && (
              <span className="block">
                {i18n.t("for {survey}", { survey: row.reservedFor.surveyName })}
              </span>
            )}
          </span>
        </div>
        <div className="outing-cell is-due">
          <span className="outing-label">{i18n.t("Calibration due")}</span>
          <span className={isOverdue || row.calibrationFailedOn ? "is-fault" : undefined}>
            {row.calibrationFailedOn
              ? i18n.t("failed its calibration on {date}", {
                  date: formatShortDate(row.calibrationFailedOn, locale),
                })
              : row.calibrationDueOn
                ? formatShortDate(row.calibrationDueOn, locale)
                : i18n.t("not known")}
          </span>
        </div>
        {isTypedOut ? (
          <>
            <div className="outing-cell is-who">
              <ComboboxField
                form={form}
                name="who"
                label={i18n.t("Worker or place")}
                search={async (text, signal) => [
                  ...(await searchWorkers(text, signal)).map((choice) => ({
                    ...choice,
                    value: `worker ${choice.value}`,
                  })),
                  ...searchPlaces(text),
                ]}
                onChoose={(choice) => {
                  whoField.field.onChange(choice?.value ?? null);
                  form.clearErrors("who");
                  if (choice) requestAnimationFrame(() => go("checkBeforeDb"));
                }}
              />
            </div>
            <div className="outing-cell">
              <NumberField form={form} name="checkBeforeDb" label={i18n.t("Check before")} />
            </div>
            <div className="outing-cell">
              <TimeField form={form} name="outTime" label={i18n.t("Out")} />
            </div>
            {phase === "out" && sendOutAct}
          </>
        ) : (
          <>
            <div className="outing-cell is-who">
              <span className="outing-label">{i18n.t("Worker or place")}</span>
              {name ?? "–"}
              {run?.employeeNumber && <span className="beneath">{run.employeeNumber}</span>}
            </div>
            <div className="outing-cell is-figure">
              <span className="outing-label">{i18n.t("Check before")}</span>
              {formatLevel(run?.checkBeforeDb ?? null, locale)}
            </div>
            <div className="outing-cell is-figure">
              <span className="outing-label">{i18n.t("Out")}</span>
              {time(run?.outAt ?? null)}
            </div>
          </>
        )}
        {isTypedBack && (
          <>
            <div className="outing-cell">
              <TimeField form={form} name="backTime" label={i18n.t("Back")} />
            </div>
            <div className="outing-cell">
              <NumberField form={form} name="checkAfterDb" label={i18n.t("Check after")} />
            </div>
            <div className="outing-cell is-readings">
              {presets.map((settings, index) => (
                <TextField
                  key={JSON.stringify(settings)}
                  form={form}
                  name={`figures.${index}`}
                  label={
                    <span title={settingsWords(i18n, settings, locale)}>{figureLabel(index)}</span>
                  }
                  inputProps={{ inputMode: "decimal", autoComplete: "off" }}
                />
              ))}
              <NumberField form={form} name="peakDb" label={i18n.t("Peak, C")} />
            </div>
            {phase === "both" ? (
              sendOutAct
            ) : (
              <div className="outing-cell is-act">
                <Button type="submit" isBusy={isBusy}>
                  {i18n.t("Take back in")}
                </Button>
                <TextButton onClick={() => setAsk({ kind: "undo" })}>
                  {i18n.t("It never went out")}
                </TextButton>
              </div>
            )}
          </>
        )}
        {(isBack || (phase === "back" && !canChange)) && (
          <>
            <div className="outing-cell is-figure">
              <span className="outing-label">{i18n.t("Back")}</span>
              {time(run?.backAt ?? null)}
            </div>
            <div className="outing-cell is-figure">
              <span className="outing-label">{i18n.t("Check after")}</span>
              {formatLevel(run?.checkAfterDb ?? null, locale)}
            </div>
            <div className="outing-cell is-readings">
              <span className="outing-label">{i18n.t("Readings")}</span>
              {run && (
                <span>
                  <TextLink to={paths.run(run.id)}>
                    {run.isVoid
                      ? i18n.t("discarded")
                      : i18n.t("{count, plural, one {# reading} other {# readings}}", {
                          count: run.readingsCount,
                        })}
                  </TextLink>
                  {run.keptReason && (
                    <span className="beneath block">
                      {i18n.t("kept: {reason}", { reason: run.keptReason })}
                    </span>
                  )}
                </span>
              )}
            </div>
            <div className="outing-cell is-act">
              {isBack && canChange && (
                <TextButton
                  onClick={() => {
                    setGoesOutAgain(true);
                    requestAnimationFrame(() => go("who"));
                  }}
                >
                  {i18n.t("Out again")}
                </TextButton>
              )}
            </div>
          </>
        )}
        {isTypedBack && (
          <details className="outing-more">
            <summary>{i18n.t("More about this run")}</summary>
            <div className="outing-more-fields">
              <SelectField
                form={form}
                name="covers"
                label={i18n.t("It covers")}
                choices={[
                  { value: "shift", label: i18n.t("the shift") },
                  { value: "projected", label: i18n.t("a part; the rest was like it") },
                  { value: "part", label: i18n.t("a part; only evidence") },
                ]}
              />
              <label className="choice">
                <input type="checkbox" {...form.register("isClipped")} />
                <span>{i18n.t("It showed overload")}</span>
              </label>
              <label className="choice">
                <input type="checkbox" {...form.register("isUnderRange")} />
                <span>{i18n.t("It showed levels under its range")}</span>
              </label>
              <TextAreaField
                form={form}
                name="unusual"
                label={i18n.t("Anything unusual")}
                rows={2}
                isOptional
              />
            </div>
          </details>
        )}
      </form>
      {ask && (
        <OutingAsk
          ask={ask}
          timeZone={timeZone}
          isBusy={isBusy}
          onTwice={(cell, instant) =>
            void submit(cell === "outTime" ? { outInstant: instant } : { backInstant: instant })
          }
          onWornUntil={(instant) => void submit({ backInstant: instant, wasWornUntilThen: true })}
          onCovers={(covers) => void submit({ covers })}
          onKeep={(keptReason) => void submit({ keptReason })}
          onDiscard={(discardReason) => void submit({ discardReason })}
          onUndo={(reason) =>
            run &&
            undo.mutate(
              { runId: run.id, revision: run.revision, reason },
              {
                onSuccess: () =>
                  done(
                    i18n.t("{serial} is here again; its run is struck.", {
                      serial: row.serialNumber,
                    }),
                  ),
                onError: show,
              },
            )
          }
          onShowAnew={() => {
            setAsk(null);
            onShowAnew();
          }}
          onLeave={() => {
            answers.current = {};
            setAsk(null);
            go(phase === "back" ? "checkAfterDb" : "outTime");
          }}
        />
      )}
    </li>
  );
}

/** What an instrument without presets is read under, as a meter is. */
const presetsOf = ({ presets }: Row): Row["presets"] =>
  presets.length > 0 ? presets : [LAEQ_SETTINGS];

const emptyRow = (row: Row): RowValues => ({
  who: null,
  checkBeforeDb: null,
  outTime: null,
  backTime: null,
  checkAfterDb: null,
  figures: presetsOf(row).map(() => ""),
  peakDb: null,
  // A place has no shift that its reading could cover.
  covers: row.run?.isOut && row.run.workerId === null ? "part" : "shift",
  isClipped: false,
  isUnderRange: false,
  unusual: null,
});
