import { useLingui } from "@lingui/react";
import {
  type ComponentProps,
  type FormEventHandler,
  type InputHTMLAttributes,
  type ReactNode,
  useEffect,
  useId,
  useState,
} from "react";
import {
  type DefaultValues,
  type FieldErrors,
  type FieldPath,
  type FieldValues,
  get,
  type Resolver,
  type UseFormReturn,
  type UseFormSetError,
  useController,
  useForm,
} from "react-hook-form";
import type { z } from "zod";
import { formatShortDate, parseDate, parseTime } from "../../shared/format/date";
import { parseDuration } from "../../shared/format/duration";
import { fieldNumber, type Parsed, parseNumber } from "../../shared/format/number";
import { type FieldIssue, issueText } from "../../shared/problems/issue-text";
import { ApiError, connectionEvents } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { readTyped, useTypedKey, writeTyped } from "../lib/keep-typed";
import { Button } from "./button";

/**
 * What a field's own parser says no with travels to the form's resolver in place of a value. A class, because the form
 * library copies plain objects and keeps the instances of classes.
 */
export class Unreadable {
  constructor(
    readonly code: FieldIssue["code"],
    readonly text: string,
  ) {}

  toJSON() {
    return { unreadable: this.code, text: this.text };
  }

  static revive(value: unknown): unknown {
    return typeof value === "object" && value !== null && "unreadable" in value && "text" in value
      ? new Unreadable(String(value.unreadable), String(value.text))
      : value;
  }
}

function findUnreadable(value: unknown, path: string[] = []): { path: string; code: string }[] {
  if (value instanceof Unreadable) return [{ path: path.join("."), code: value.code }];
  if (typeof value !== "object" || value === null) return [];
  return Object.entries(value).flatMap(([key, child]) => findUnreadable(child, [...path, key]));
}

function toFieldIssue(issue: z.core.$ZodIssue): FieldIssue {
  if (issue.code === "custom") {
    const params = issue.params ?? {};
    return { code: String(params.code ?? "custom"), params };
  }
  return { code: issue.code, params: { ...issue } };
}

type FormSchema = z.ZodType<FieldValues, FieldValues>;

/**
 * A form held to the schema that the server uses. Codes become sentences here, in the reader's language; an unreadable
 * field (a number with an ambiguous comma) is named as such before the schema is asked. What is typed is kept over a
 * reload and a lost session.
 */
export function useSchemaForm<Schema extends FormSchema>(
  schema: Schema,
  {
    keepAs = "",
    ...options
  }: {
    defaultValues: DefaultValues<z.input<Schema>>;
    mode?: "onBlur" | "onSubmit";
    /** Which of several records at one address, or of several forms with the same fields; null: kept elsewhere. */
    keepAs?: string | null;
  },
): UseFormReturn<z.input<Schema>, unknown, z.output<Schema>> {
  const { i18n } = useLingui();
  const resolver: Resolver<z.input<Schema>, unknown, z.output<Schema>> = (values) => {
    const unread = findUnreadable(values);
    const parsed = schema.safeParse(values);
    if (unread.length === 0 && parsed.success) return { values: parsed.data, errors: {} };
    const errors: Record<string, unknown> = {};
    const put = (path: string, issue: FieldIssue) => {
      if (get(errors, path) === undefined)
        setAt(errors, path, { type: issue.code, message: issueText(i18n, issue) });
    };
    for (const { path, code } of unread) put(path, { code, params: {} });
    for (const issue of parsed.error?.issues ?? []) {
      const path = issue.path.map(String).join(".");
      // Nothing was written that could be written wrongly.
      const isMissing = issue.code === "invalid_format" && path !== "" && get(values, path) === "";
      put(path || "root", isMissing ? { code: "required", params: {} } : toFieldIssue(issue));
    }
    return { values: {}, errors: errors as FieldErrors<z.input<Schema>> };
  };
  const form = useForm<z.input<Schema>, unknown, z.output<Schema>>({
    mode: "onBlur",
    ...options,
    resolver,
  });
  const fields = Object.keys(options.defaultValues).join();
  useKeepTyped(form, keepAs === null ? null : `${window.location.pathname} ${keepAs} ${fields}`);
  return form;
}

/**
 * Keeps what differs from what the form opened with, so that another's change meanwhile is not undone by it. A form that
 * goes while all is well was saved or left on purpose; one that goes because nobody is signed in any more comes back as
 * it was.
 */
function useKeepTyped<Values extends FieldValues, Output>(
  form: UseFormReturn<Values, unknown, Output>,
  name: string | null,
): void {
  const key = useTypedKey(name);
  const [kept] = useState(() => ({ key, values: readTyped(key, Unreadable.revive) }));
  // biome-ignore lint/correctness/useExhaustiveDependencies: the form's methods stay what they are
  useEffect(() => {
    if (kept.key === null) return;
    const unsubscribe = form.subscribe({
      formState: { values: true },
      callback({ values, defaultValues }) {
        const typed = Object.entries<unknown>(values).filter(
          ([field, value]) => JSON.stringify(value) !== JSON.stringify(defaultValues?.[field]),
        );
        writeTyped(kept.key, typed.length > 0 ? Object.fromEntries(typed) : null);
      },
    });
    for (const [field, value] of Object.entries(kept.values ?? {}))
      form.setValue(field as FieldPath<Values>, value, { shouldDirty: true });
    return () => {
      unsubscribe();
      if (connectionEvents.now() === "ok") writeTyped(kept.key, null);
    };
  }, [kept]);
}

function setAt(target: Record<string, unknown>, path: string, value: unknown): void {
  const keys = path.split(".");
  const last = keys.pop() ?? path;
  let at = target;
  for (const key of keys) {
    at[key] ??= {};
    at = at[key] as Record<string, unknown>;
  }
  at[last] = value;
}

/**
 * For `onError` of a change: the server's issues go to their fields and the first gets the focus. Anything else stays
 * the caller's to show (`problemText`).
 */
export function showIssuesOn<Values extends FieldValues>(
  form: { setError: UseFormSetError<Values> },
  i18n: Parameters<typeof issueText>[0],
): (error: unknown) => void {
  return (error) => {
    if (!(error instanceof ApiError)) return;
    error.issues.forEach((issue, index) => {
      form.setError(
        (issue.path || "root") as FieldPath<Values>,
        { type: issue.code, message: issueText(i18n, issue) },
        { shouldFocus: index === 0 },
      );
    });
  };
}

export function Form({
  labels = "left",
  children,
  onSubmit,
  ...props
}: ComponentProps<"form"> & {
  labels?: "left" | "above";
  onSubmit: FormEventHandler<HTMLFormElement>;
}) {
  return (
    <form
      noValidate
      {...props}
      onSubmit={onSubmit}
      className={`form${labels === "above" ? " is-above" : ""} ${props.className ?? ""}`}
    >
      {children}
    </form>
  );
}

export interface FieldProps<Values extends FieldValues, Output> {
  form: UseFormReturn<Values, unknown, Output>;
  name: FieldPath<Values>;
  label: ReactNode;
  unit?: ReactNode;
  note?: ReactNode;
  isOptional?: boolean;
  isReadOnly?: boolean;
}

interface FieldWires {
  id: string;
  "aria-describedby": string | undefined;
  "aria-invalid": true | undefined;
  "aria-required": true | undefined;
  readOnly: boolean | undefined;
}

/** Label, unit, note and error of a field, wired once. For a control that none of the fields below is. */
export function Field({
  label,
  unit,
  note,
  error,
  isOptional = false,
  isReadOnly = false,
  isGroup = false,
  children,
}: {
  label: ReactNode;
  unit?: ReactNode;
  note?: ReactNode;
  error: string | undefined;
  isOptional?: boolean;
  isReadOnly?: boolean;
  /** Several controls under one label: a group with a name. */
  isGroup?: boolean;
  children: (wires: FieldWires) => ReactNode;
}) {
  const { i18n } = useLingui();
  const id = useId();
  const described = [unit && `${id}-unit`, note && `${id}-note`, error && `${id}-error`].filter(
    Boolean,
  );
  const describedBy = described.length > 0 ? described.join(" ") : undefined;
  const labelText = (
    <>
      {label}
      {isOptional && <span className="optional"> {i18n.t("(optional)")}</span>}
    </>
  );
  const control = children({
    id,
    "aria-describedby": describedBy,
    "aria-invalid": error ? true : undefined,
    "aria-required": isOptional || isReadOnly ? undefined : true,
    readOnly: isReadOnly || undefined,
  });
  const rest = (
    <>
      {note && (
        <p className="field-note" id={`${id}-note`}>
          {note}
        </p>
      )}
      {error && (
        <p className="field-error" id={`${id}-error`}>
          {error}
        </p>
      )}
    </>
  );
  if (isGroup) {
    return (
      // biome-ignore lint/a11y/useSemanticElements: a fieldset can't be a grid of label and controls in every browser
      <div
        className="field"
        role="group"
        aria-labelledby={`${id}-label`}
        aria-describedby={describedBy}
      >
        <span className="field-label" id={`${id}-label`}>
          {labelText}
        </span>
        <div className="choices">{control}</div>
        {rest}
      </div>
    );
  }
  return (
    <div className="field">
      <label className="field-label" htmlFor={id}>
        {labelText}
      </label>
      <div className="field-line">
        {control}
        {unit && (
          <span className="unit" id={`${id}-unit`}>
            {unit}
          </span>
        )}
      </div>
      {rest}
    </div>
  );
}

function useField<Values extends FieldValues, Output>({
  form,
  name,
}: Pick<FieldProps<Values, Output>, "form" | "name">) {
  const { field, fieldState } = useController({ control: form.control, name });
  return { field, error: fieldState.error?.message };
}

export function TextField<Values extends FieldValues, Output>({
  inputProps,
  ...props
}: FieldProps<Values, Output> & { inputProps?: InputHTMLAttributes<HTMLInputElement> }) {
  const { field, error } = useField(props);
  return (
    <Field {...props} error={error}>
      {(wires) => (
        <input className="input" {...inputProps} {...field} {...wires} value={field.value ?? ""} />
      )}
    </Field>
  );
}

export function TextAreaField<Values extends FieldValues, Output>({
  rows = 4,
  ...props
}: FieldProps<Values, Output> & { rows?: number }) {
  const { field, error } = useField(props);
  return (
    <Field {...props} error={error}>
      {(wires) => (
        <textarea className="input" rows={rows} {...field} {...wires} value={field.value ?? ""} />
      )}
    </Field>
  );
}

/**
 * A field whose text is read by a parser. What can't be read stays in the field as typed, and in the form as
 * unreadable: it is neither dropped nor taken for empty. It is said on leaving the field, whenever the form says the rest.
 */
function ParsedField<Values extends FieldValues, Output, Value>({
  parse,
  write,
  code,
  kind,
  inputProps,
  ...props
}: FieldProps<Values, Output> & {
  parse: (text: string) => Parsed<Value>;
  write: (value: Value) => string;
  code: string;
  kind: "number" | "date" | "time";
  inputProps?: InputHTMLAttributes<HTMLInputElement>;
}) {
  const { i18n } = useLingui();
  const { field, error } = useField(props);
  const [typed, setTyped] = useState<{ text: string; value: unknown } | null>(null);
  const stored: unknown = field.value;
  const fault =
    stored instanceof Unreadable && typed === null
      ? issueText(i18n, { code: stored.code, params: {} })
      : undefined;
  const written =
    stored instanceof Unreadable
      ? stored.text
      : stored === null || stored === undefined || stored === ""
        ? ""
        : write(stored as Value);
  const text = typed && Object.is(typed.value, stored) ? typed.text : written;
  return (
    <Field {...props} error={error ?? fault}>
      {(wires) => (
        <input
          className={`input is-${kind}`}
          inputMode={kind === "number" ? "decimal" : undefined}
          autoComplete="off"
          {...inputProps}
          {...wires}
          ref={field.ref}
          name={field.name}
          value={text}
          onChange={(event) => {
            const next = event.target.value;
            const parsed = parse(next);
            const value =
              parsed.kind === "ok"
                ? parsed.value
                : parsed.kind === "empty"
                  ? null
                  : new Unreadable(parsed.kind === "ambiguous" ? "ambiguous" : code, next);
            setTyped({ text: next, value });
            field.onChange(value);
          }}
          onBlur={() => {
            setTyped(null);
            field.onBlur();
          }}
        />
      )}
    </Field>
  );
}

export function NumberField<Values extends FieldValues, Output>({
  factor = 1,
  ...props
}: FieldProps<Values, Output> & {
  /** What is typed is the form's value times this: 1e6 where it has s and the field µs. */
  factor?: number;
}) {
  const locale = useLocale();
  return (
    <ParsedField
      {...props}
      kind="number"
      code="not-a-number"
      parse={(text) => {
        const parsed = parseNumber(text, locale);
        return parsed.kind === "ok" ? { kind: "ok", value: parsed.value / factor } : parsed;
      }}
      write={(value: number) => fieldNumber(value * factor, locale)}
    />
  );
}

/** Minutes, typed as `450`, `7:30` or `7.5h`. */
export function DurationField<Values extends FieldValues, Output>(
  props: FieldProps<Values, Output>,
) {
  const locale = useLocale();
  return (
    <ParsedField
      {...props}
      kind="number"
      code="not-a-duration"
      inputProps={{ inputMode: "text" }}
      parse={(text) => parseDuration(text, locale)}
      write={(value: number) => fieldNumber(value, locale)}
    />
  );
}

const orInvalid = (value: string | null, text: string): Parsed<string> =>
  value !== null ? { kind: "ok", value } : { kind: text.trim() === "" ? "empty" : "invalid" };

/** An ISO date in the form; in the field as the locale writes it. */
export function DateField<Values extends FieldValues, Output>(props: FieldProps<Values, Output>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <ParsedField
      {...props}
      unit={props.unit ?? (locale === "en" ? i18n.t("yyyy-mm-dd") : i18n.t("dd.mm.yyyy"))}
      kind="date"
      code="not-a-date"
      parse={(text) => orInvalid(parseDate(text, locale), text)}
      write={(value: string) => (locale === "en" ? value : formatShortDate(value, locale))}
    />
  );
}

export function TimeField<Values extends FieldValues, Output>(props: FieldProps<Values, Output>) {
  return (
    <ParsedField
      {...props}
      kind="time"
      code="not-a-time"
      parse={(text) => orInvalid(parseTime(text), text)}
      write={(value: string) => value}
    />
  );
}

export interface Choice {
  readonly value: string;
  readonly label: string;
  readonly note?: string;
}

export function SelectField<Values extends FieldValues, Output>({
  choices,
  emptyLabel,
  ...props
}: FieldProps<Values, Output> & {
  choices: readonly Choice[];
  /** First line that stands for no choice; without it the first choice is the start. */
  emptyLabel?: string;
}) {
  const { field, error } = useField(props);
  return (
    <Field {...props} error={error}>
      {({ readOnly, ...wires }) => (
        <select
          className="input"
          {...field}
          {...wires}
          disabled={readOnly}
          value={field.value ?? ""}
          onChange={(event) =>
            field.onChange(event.target.value === "" ? null : event.target.value)
          }
        >
          {emptyLabel !== undefined && <option value="">{emptyLabel}</option>}
          {choices.map((choice) => (
            <option key={choice.value} value={choice.value}>
              {choice.label}
            </option>
          ))}
        </select>
      )}
    </Field>
  );
}

export function RadioGroup<Values extends FieldValues, Output>({
  choices,
  ...props
}: FieldProps<Values, Output> & { choices: readonly Choice[] }) {
  const { field, error } = useField(props);
  return (
    <Field {...props} error={error} isGroup>
      {(wires) =>
        choices.map((choice, index) => (
          <label key={choice.value} className="choice">
            <input
              type="radio"
              name={field.name}
              ref={index === 0 ? field.ref : undefined}
              value={choice.value}
              checked={field.value === choice.value}
              disabled={wires.readOnly}
              aria-invalid={wires["aria-invalid"]}
              onChange={() => field.onChange(choice.value)}
              onBlur={field.onBlur}
            />
            <span>
              {choice.label}
              {choice.note && <span className="beneath block">{choice.note}</span>}
            </span>
          </label>
        ))
      }
    </Field>
  );
}

/** One yes or no; `label` stands left like any field's, `text` beside the box. */
export function CheckField<Values extends FieldValues, Output>({
  text,
  ...props
}: FieldProps<Values, Output> & { text: ReactNode }) {
  const { field, error } = useField(props);
  return (
    <Field {...props} error={error} isGroup isOptional={false}>
      {(wires) => (
        <label className="choice">
          <input
            type="checkbox"
            ref={field.ref}
            name={field.name}
            checked={field.value === true}
            disabled={wires.readOnly}
            aria-invalid={wires["aria-invalid"]}
            onChange={(event) => field.onChange(event.target.checked)}
            onBlur={field.onBlur}
          />
          <span>{text}</span>
        </label>
      )}
    </Field>
  );
}

export function FormActions({ children }: { children: ReactNode }) {
  return <div className="form-actions">{children}</div>;
}

export function SubmitButton({
  isBusy = false,
  size,
  children,
}: {
  isBusy?: boolean;
  size?: "officer" | "supervisor" | "worker";
  children: ReactNode;
}) {
  return (
    <Button
      type="submit"
      kind="primary"
      isBusy={isBusy}
      size={size}
      // Leaving a field may take its error away, and the button from under the pointer: the focus follows on release.
      onMouseDown={(event) => event.preventDefault()}
      onMouseUp={(event) => event.currentTarget.focus()}
    >
      {children}
    </Button>
  );
}
