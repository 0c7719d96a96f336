import { useLingui } from "@lingui/react";
import { useId, useState } from "react";
import { useForm } from "react-hook-form";
import type { MeterSettings } from "../../../shared/acoustics/types";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import type { GridRow } from "../../../shared/schemas/shift";
import { Button } from "../../components/button";
import { ComboboxField } from "../../components/combobox-field";
import { Field } from "../../components/form";
import { TextButton, TextLink } from "../../components/link";
import { COMMON_SETTINGS, isSameSettings } from "../../components/meter-settings";
import { useLocale } from "../../lib/i18n";
import { tooManyText } from "../../lib/too-many";
import { paths } from "../../paths";
import { type Cell, cellOf, editText, emptyCell, parseCell, unaccountedIn } from "./cells";
import { type CellId, type GridColumn, taskCell, wornCell } from "./columns";
import { type FurtherReading, type RunSetup, runOf } from "./draft";
import { type RowEvaluation, usualSetup, wornTaskIds } from "./evaluate-rows";
import type { DayEntryState } from "./use-day-entry";
import { faultText, problemWords, settingsText, unaccountedWords } from "./words";

/** As many as a run may have. */
const MOST_READINGS = 12;
/** The server takes no more. */
const LONGEST_NOTE = 10_000;

interface RowFormProps {
  readonly entry: DayEntryState;
  readonly found: RowEvaluation;
  readonly gridRow: GridRow;
  readonly columns: readonly GridColumn[];
  readonly taskName: (id: string) => string;
  /** On a phone it is all there is; under the grid only what the grid has no column for. */
  readonly isWhole: boolean;
}

/** One worker's row as a form: every field of the grid, and what the grid has no column for. */
export function RowForm(props: RowFormProps) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { entry, found, gridRow, columns, isWhole } = props;
  const { row } = found;
  const { workerId } = row;
  const worn = wornTaskIds(found.input);
  const tasks = columns.flatMap(({ task }) => task ?? []);
  const wornTasks = tasks.filter(({ id }) => worn.has(id));
  const minutes = i18n.t("min");
  return (
    <div className="row-form form">
      {isWhole && (
        <>
          <CellField {...props} cell="start" label={i18n.t("Start")} kind="time" />
          <CellField
            {...props}
            cell="length"
            label={i18n.t("Length")}
            unit={minutes}
            note={formatDuration(found.lengthMin, locale)}
          />
          {tasks.map((task) => (
            <CellField
              key={task.id}
              {...props}
              cell={taskCell(task.id)}
              label={task.name}
              unit={minutes}
              note={
                task.level
                  ? i18n.t("{level} dB", { level: formatLevel(task.level.levelDb, locale) })
                  : i18n.t("no level yet")
              }
            />
          ))}
        </>
      )}
      <AddTask {...props} />
      <Unaccounted {...props} />
      <Field label={i18n.t("Protector, by task")} error={undefined} isGroup>
        {() => (
          <>
            {found.protectors.length === 0 && <p>{i18n.t("none")}</p>}
            {found.protectors.map(({ name, taskNames }) => (
              <p key={name}>
                {name} <span className="beneath">{taskNames.join(", ")}</span>
              </p>
            ))}
            <TextLink to={paths.worker(workerId)}>{i18n.t("Assign a protector")}</TextLink>
          </>
        )}
      </Field>
      {isWhole && (
        <CellField
          {...props}
          cell="worn"
          label={i18n.t("Worn")}
          unit="%"
          note={i18n.t("One figure for the whole shift")}
        />
      )}
      {wornTasks.length > 0 && (
        <details className="row-more">
          <summary>{i18n.t("Wearing time task by task")}</summary>
          {wornTasks.map((task) => (
            <CellField
              key={task.id}
              {...props}
              cell={wornCell(task.id)}
              label={i18n.t("Worn in {task}", { task: task.name })}
              unit="%"
              note={
                row.cells[wornCell(task.id)]?.value == null
                  ? i18n.t("Empty: as for the whole shift")
                  : undefined
              }
            />
          ))}
        </details>
      )}
      <Reading {...props} />
      <Field label={i18n.t("Note")} isOptional error={tooManyText(i18n, row.note, LONGEST_NOTE)}>
        {(wires) => (
          <textarea
            {...wires}
            className="input"
            rows={2}
            value={row.note}
            onChange={(event) =>
              entry.dispatch({ type: "patch-row", workerId, patch: { note: event.target.value } })
            }
          />
        )}
      </Field>
      {gridRow.otherShifts.map(({ shiftId, localStart, lengthMin }) => (
        <p key={shiftId} className="beneath">
          {i18n.t("Another shift of that day: {start}, {length}.", {
            start: localStart,
            length: formatDuration(lengthMin, locale),
          })}{" "}
          <TextLink to={paths.shift(shiftId)}>{i18n.t("Open it")}</TextLink>
        </p>
      ))}
      {row.base && (
        <p className="beneath">
          {i18n.t("Revision {revision}, by {name}.", {
            revision: row.base.revision,
            name: gridRow.saved?.authorName ?? i18n.t("nobody named"),
          })}{" "}
          <TextLink to={paths.shift(row.base.shiftId)}>{i18n.t("All revisions")}</TextLink>
        </p>
      )}
    </div>
  );
}

function CellField({
  entry,
  found,
  cell,
  label,
  unit,
  note,
  kind = "number",
  taskName,
}: RowFormProps & {
  cell: CellId;
  label: string;
  unit?: string;
  note?: string;
  kind?: "number" | "time" | "text";
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const words = unaccountedWords(i18n);
  const [text, setText] = useState<string | null>(null);
  const { row } = found;
  const value = row.cells[cell];
  const isFilled = value?.mark === "filled" && !row.isConfirmed;
  const problem = found.problems.find((one) => one.cell === cell);
  const error = problem && problemWords(i18n, problem, locale, taskName);
  return (
    <Field
      label={label}
      unit={unit}
      note={isFilled ? [note, i18n.t("filled in")].filter(Boolean).join(", ") : note}
      error={error && `${error.title} ${error.mend}`}
      isOptional={cell !== "start" && cell !== "length"}
    >
      {(wires) => (
        <input
          {...wires}
          className={`input is-${kind}${isFilled ? " is-filled-in" : ""}`}
          inputMode={kind === "number" ? "text" : undefined}
          autoComplete="off"
          value={text ?? editText(value, locale, words)}
          onChange={(event) => {
            setText(event.target.value);
            const parsed = parseCell(cell, event.target.value, locale, words);
            entry.dispatch({
              type: "set-cells",
              changes: [{ workerId: row.workerId, cell, value: parsed }],
            });
          }}
          onBlur={() => setText(null)}
        />
      )}
    </Field>
  );
}

/** A task that is no column of this crew becomes one for the day. */
function AddTask({ entry, found, columns }: RowFormProps) {
  const { i18n } = useLingui();
  const form = useForm<{ taskId: string | null }>({ defaultValues: { taskId: null } });
  const shown = new Set(columns.flatMap(({ task }) => task?.id ?? []));
  const others = entry.view.tasks.filter(({ id }) => !shown.has(id));
  if (others.length === 0) return null;
  return (
    <ComboboxField
      key={shown.size}
      form={form}
      name="taskId"
      label={i18n.t("Add a task")}
      isOptional
      note={i18n.t("It becomes a column of this day.")}
      search={async (text) => {
        const wanted = text.trim().toLocaleLowerCase();
        return others
          .filter(({ name }) => name.toLocaleLowerCase().includes(wanted))
          .slice(0, 40)
          .map(({ id, name }) => ({ value: id, label: name }));
      }}
      onChoose={(choice) => {
        if (!choice || found.row.isAbsent) return;
        entry.dispatch({ type: "add-task", taskId: choice.value });
      }}
    />
  );
}

function Unaccounted({ entry, found }: RowFormProps) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { row } = found;
  const how = unaccountedIn(row.cells.unaccounted);
  const { workerId } = row;
  const [text, setText] = useState<string | null>(null);
  const words = unaccountedWords(i18n);
  const shown =
    text ??
    (how.how === "quiet"
      ? editText(cellOf(how, "typed"), locale, words).replace(words.quiet, "").trim()
      : "");
  const set = (value: ReturnType<typeof parseCell>) =>
    entry.dispatch({ type: "set-cells", changes: [{ workerId, cell: "unaccounted", value }] });
  const setQuiet = (level: string) =>
    set(parseCell("unaccounted", `${words.quiet} ${level}`, locale, words));
  const minutes = found.unaccountedMin;
  if (minutes === null || minutes < 0.5) return null;
  const name = `how-${workerId}`;
  const fault = row.cells.unaccounted?.fault ?? null;
  const isQuiet = how.how === "quiet" || fault !== null;
  return (
    <Field
      label={i18n.t("Not accounted for")}
      error={fault ? i18n.t("Write the level of the quiet time, from 20 to 160 dB.") : undefined}
      note={i18n.t("{duration}: what was it?", { duration: formatDuration(minutes, locale) })}
      isGroup
    >
      {() => (
        <>
          <label className="choice">
            <input
              type="radio"
              name={name}
              checked={how.how === "unknown" && !isQuiet}
              onChange={() => set(cellOf({ how: "unknown" }, "typed"))}
            />
            {i18n.t("unknown")}
          </label>
          <label className="choice">
            <input
              type="radio"
              name={name}
              checked={how.how === "like-the-rest"}
              onChange={() => set(cellOf({ how: "like-the-rest" }, "typed"))}
            />
            {i18n.t("like the rest")}
          </label>
          <label className="choice">
            <input type="radio" name={name} checked={isQuiet} onChange={() => setQuiet(shown)} />
            {i18n.t("quiet")}
          </label>
          {isQuiet && (
            <span className="field-line">
              <input
                className="input is-number"
                aria-label={i18n.t("Level of the quiet time, dB")}
                aria-invalid={fault !== null || undefined}
                value={shown}
                onChange={(event) => {
                  setText(event.target.value);
                  setQuiet(event.target.value);
                }}
                onBlur={() => setText(null)}
              />
              <span className="unit">dB</span>
            </span>
          )}
        </>
      )}
    </Field>
  );
}

const settingsKey = (settings: MeterSettings) => JSON.stringify(settings);

/** Settings to choose from: the instrument's own first, then the common ones. */
function settingsChoices(own: readonly MeterSettings[]): MeterSettings[] {
  const choices = new Map<string, MeterSettings>();
  for (const { criterionLevelDb, exchangeRateDb, thresholdDb, weighting, response } of [
    ...own,
    ...COMMON_SETTINGS,
  ]) {
    const one = { criterionLevelDb, exchangeRateDb, thresholdDb, weighting, response };
    choices.set(settingsKey(one), one);
  }
  return [...choices.values()];
}

/** Instrument, settings rows and what the run covers; the figure of the first row is the grid's cell. */
function Reading(props: RowFormProps) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { entry, found, gridRow } = props;
  const { row } = found;
  const { workerId } = row;
  const { instruments } = entry.view;
  const setup = row.runSetup ?? usualSetup(entry.view, entry.draft.rows);
  const [minutes, setMinutes] = useState<string | null>(null);
  const words = unaccountedWords(i18n);
  const [stored] = runOf(gridRow.readings);
  if (!setup) {
    return (
      <p className="beneath">
        {i18n.t("No instrument with settings at this site: readings can’t be entered.")}{" "}
        <TextLink to={paths.instruments}>{i18n.t("Instruments")}</TextLink>
      </p>
    );
  }
  const patch = (change: Partial<RunSetup>) =>
    entry.dispatch({
      type: "patch-row",
      workerId,
      patch: { runSetup: { ...setup, ...change }, isRunTouched: true },
    });
  const isOpen = row.cells.reading?.value != null || setup.further.length > 0;
  return (
    <details className="row-more" open={isOpen || undefined}>
      <summary>{i18n.t("Reading of a run")}</summary>
      <Field label={i18n.t("Instrument")} error={undefined}>
        {(wires) => (
          <select
            {...withoutReadOnly(wires)}
            className="input"
            value={setup.instrumentId}
            disabled={stored !== undefined}
            onChange={(event) => {
              const next = instruments.find(({ id }) => id === event.target.value);
              const settings = next?.presets[0] ?? setup.settings;
              patch({ instrumentId: event.target.value, settings });
            }}
          >
            {instruments.map(({ id, name, serialNumber }) => (
              <option key={id} value={id}>
                {name}, {serialNumber}
              </option>
            ))}
          </select>
        )}
      </Field>
      <SettingsRows {...props} setup={setup} onPatch={patch} />
      <Field
        label={i18n.t("Run time")}
        unit={i18n.t("min")}
        isOptional
        note={i18n.t("Empty: as long as the shift")}
        error={undefined}
      >
        {(wires) => (
          <input
            {...wires}
            className="input is-number"
            value={minutes ?? editText(cellOf(setup.durationMin, "typed"), locale, words)}
            onChange={(event) => {
              setMinutes(event.target.value);
              const parsed = parseCell("length", event.target.value, locale, words);
              patch({
                durationMin:
                  typeof parsed.value === "number" && parsed.value > 0 ? parsed.value : null,
              });
            }}
            onBlur={() => setMinutes(null)}
          />
        )}
      </Field>
      <Field label={i18n.t("It covers")} error={undefined}>
        {(wires) => (
          <select
            {...withoutReadOnly(wires)}
            className="input"
            value={setup.covers}
            onChange={(event) => patch({ covers: event.target.value as RunSetup["covers"] })}
          >
            <option value="shift">{i18n.t("the whole shift")}</option>
            <option value="projected">{i18n.t("a part, and the rest was like it")}</option>
            <option value="part">{i18n.t("a part only: kept as evidence")}</option>
          </select>
        )}
      </Field>
    </details>
  );
}

/** One line for each of the settings under which the instrument was read. */
function SettingsRows({
  setup,
  onPatch,
  ...props
}: RowFormProps & { setup: RunSetup; onPatch: (change: Partial<RunSetup>) => void }) {
  const { i18n } = useLingui();
  const { entry, found } = props;
  const { cells, workerId } = found.row;
  const instrument = entry.view.instruments.find(({ id }) => id === setup.instrumentId);
  const used = [setup.settings, ...setup.further.map(({ settings }) => settings)];
  const isUsed = (settings: MeterSettings) => used.some((one) => isSameSettings(one, settings));
  const choices = settingsChoices([...((instrument?.presets ?? []) as MeterSettings[]), ...used]);
  const unused = choices.find((settings) => !isUsed(settings));
  const setFurther = (at: number, change: Partial<FurtherReading>) =>
    onPatch({
      further: setup.further.map((one, place) => (place === at ? { ...one, ...change } : one)),
    });
  return (
    <Field
      label={i18n.t("Readings")}
      error={undefined}
      note={i18n.t(
        "98.9 is a level in dB, 63 % a dose. A reading counts only for criteria with its settings.",
      )}
      isGroup
    >
      {() => (
        <>
          <SettingsLine
            number={1}
            settings={setup.settings}
            cell={cells.reading}
            choices={choices.filter((one) => isSameSettings(one, setup.settings) || !isUsed(one))}
            onSettings={(settings) => onPatch({ settings })}
            onCell={(value) =>
              entry.dispatch({
                type: "set-cells",
                changes: [{ workerId, cell: "reading", value }],
              })
            }
          />
          {setup.further.map(({ settings, cell }, at) => (
            <SettingsLine
              // biome-ignore lint/suspicious/noArrayIndexKey: its settings can be chosen anew, and the focus stays
              key={at}
              number={at + 2}
              settings={settings}
              cell={cell}
              choices={choices.filter((one) => isSameSettings(one, settings) || !isUsed(one))}
              onSettings={(chosen) => setFurther(at, { settings: chosen })}
              onCell={(value) => setFurther(at, { cell: value })}
              onTakeOut={() =>
                onPatch({ further: setup.further.filter((_, place) => place !== at) })
              }
            />
          ))}
          {unused && used.length < MOST_READINGS && (
            <Button
              onClick={() =>
                onPatch({
                  further: [
                    ...setup.further,
                    { settings: unused, cell: emptyCell("typed"), readingId: null },
                  ],
                })
              }
            >
              {i18n.t("Another settings row")}
            </Button>
          )}
        </>
      )}
    </Field>
  );
}

function SettingsLine({
  number,
  settings,
  cell,
  choices,
  onSettings,
  onCell,
  onTakeOut,
}: {
  number: number;
  settings: MeterSettings;
  cell: Cell | undefined;
  choices: readonly MeterSettings[];
  onSettings: (settings: MeterSettings) => void;
  onCell: (cell: Cell) => void;
  onTakeOut?: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const words = unaccountedWords(i18n);
  const [text, setText] = useState<string | null>(null);
  const errorId = useId();
  const fault = cell?.fault ?? null;
  const name = i18n.t("reading {number}", { number });
  return (
    <div className="settings-line">
      <select
        className="input"
        aria-label={i18n.t("Settings of {reading}", { reading: name })}
        value={choices.findIndex((one) => isSameSettings(one, settings))}
        onChange={(event) => {
          const chosen = choices[Number(event.target.value)];
          if (chosen) onSettings(chosen);
        }}
      >
        {choices.map((one, at) => (
          <option key={settingsKey(one)} value={at}>
            {settingsText(i18n, one, locale)}
          </option>
        ))}
      </select>
      <span className="field-line">
        <input
          className="input is-number"
          aria-label={i18n.t("Level or dose, {reading}", { reading: name })}
          aria-invalid={fault !== null || undefined}
          aria-describedby={fault ? errorId : undefined}
          autoComplete="off"
          value={text ?? editText(cell, locale, words)}
          onChange={(event) => {
            setText(event.target.value);
            onCell(parseCell("reading", event.target.value, locale, words));
          }}
          onBlur={() => setText(null)}
        />
        <span className="unit">{i18n.t("dB or %")}</span>
        {onTakeOut && (
          <TextButton onClick={onTakeOut}>
            {i18n.t("Take out")} <span className="sr-only">{name}</span>
          </TextButton>
        )}
      </span>
      {fault && (
        <p className="field-error" id={errorId}>
          {faultText(i18n, fault)}
        </p>
      )}
    </div>
  );
}

function withoutReadOnly<T extends { readOnly: boolean | undefined }>({
  readOnly: _,
  ...wires
}: T) {
  return wires;
}
