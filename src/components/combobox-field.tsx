import { useLingui } from "@lingui/react";
import { useEffect, useId, useRef, useState } from "react";
import { type FieldValues, useController } from "react-hook-form";
import { issueText } from "../../shared/problems/issue-text";
import { readTyped, useTypedKey, writeTyped } from "../lib/keep-typed";
import { problemText } from "../lib/problem-text";
import { type Choice, Field, type FieldProps, Unreadable } from "./form";

const PAUSE_MS = 150;

type Found =
  | { state: "idle" }
  | { state: "looking" }
  | { state: "found"; choices: readonly Choice[] }
  | { state: "failed"; error: unknown };

/**
 * A choice out of many, found by typing. The form holds the choice's value; `chosen` names the one it starts with.
 * The server does the searching, so that no list is ever loaded whole. What was typed and is none of them stays, and is
 * refused: left out it would say "none".
 */
export function ComboboxField<Values extends FieldValues, Output>({
  search,
  chosen,
  onChoose,
  ...props
}: FieldProps<Values, Output> & {
  search: (text: string, signal: AbortSignal) => Promise<readonly Choice[]>;
  chosen?: Choice | null;
  onChoose?: (choice: Choice | null) => void;
}) {
  const { i18n } = useLingui();
  const { field, fieldState } = useController({ control: props.form.control, name: props.name });
  const listId = useId();
  const [text, setText] = useState<string | null>(null);
  const [known, setKnown] = useState<Choice | null>(chosen ?? null);
  const [found, setFound] = useState<Found>({ state: "idle" });
  const [active, setActive] = useState(0);
  // A kept form has the choice's value only: its words are kept beside it.
  const typedKey = useTypedKey("choice");
  const labelKey = (value: unknown) => typedKey && `${typedKey} ${String(value)}`;
  const searchRef = useRef(search);
  searchRef.current = search;

  useEffect(() => {
    if (text === null) return;
    const aborter = new AbortController();
    setFound({ state: "looking" });
    const timer = setTimeout(() => {
      searchRef.current(text, aborter.signal).then(
        (choices) => {
          if (aborter.signal.aborted) return;
          setFound({ state: "found", choices });
          setActive(0);
        },
        (error: unknown) => {
          if (!aborter.signal.aborted) setFound({ state: "failed", error });
        },
      );
    }, PAUSE_MS);
    return () => {
      clearTimeout(timer);
      aborter.abort();
    };
  }, [text]);

  const isOpen = text !== null;
  const choices = found.state === "found" ? found.choices : [];
  const stored: unknown = field.value;
  const shown =
    text ?? (stored instanceof Unreadable ? stored.text : stored ? labelOf(stored) : "");
  const fault =
    stored instanceof Unreadable && text === null
      ? issueText(i18n, { code: stored.code, params: {} })
      : undefined;

  function labelOf(value: unknown): string {
    if (known && known.value === value) return known.label;
    return String(readTyped(labelKey(value)) ?? "");
  }

  function choose(choice: Choice | null) {
    setKnown(choice);
    if (choice) writeTyped(labelKey(choice.value), choice.label);
    setText(null);
    setFound({ state: "idle" });
    field.onChange(choice?.value ?? null);
    onChoose?.(choice);
  }

  function leave() {
    const typed = text?.trim() ?? "";
    const meant = choices.find(({ label }) => label === typed);
    if (meant) choose(meant);
    else if (typed !== "" && typed !== labelOf(stored)) {
      field.onChange(new Unreadable("invalid_value", text ?? ""));
      onChoose?.(null);
    }
    setText(null);
    field.onBlur();
  }

  function onKeyDown(event: React.KeyboardEvent) {
    if (event.key === "ArrowDown" || event.key === "ArrowUp") {
      event.preventDefault();
      if (!isOpen) setText(shown);
      else {
        const step = event.key === "ArrowDown" ? 1 : -1;
        setActive((at) =>
          choices.length === 0 ? 0 : (at + step + choices.length) % choices.length,
        );
      }
    } else if (event.key === "Enter" && isOpen) {
      event.preventDefault();
      const choice = choices[active];
      if (choice) choose(choice);
    } else if (event.key === "Escape" && isOpen) {
      event.preventDefault();
      event.stopPropagation();
      setText(null);
    }
  }

  return (
    <Field {...props} error={fieldState.error?.message ?? fault}>
      {(wires) => (
        <div className="combobox">
          <input
            className="input"
            {...wires}
            ref={field.ref}
            name={field.name}
            role="combobox"
            autoComplete="off"
            aria-autocomplete="list"
            aria-expanded={isOpen}
            aria-controls={listId}
            aria-activedescendant={isOpen && choices[active] ? `${listId}-${active}` : undefined}
            value={shown}
            onChange={(event) => {
              setText(event.target.value);
              if (event.target.value === "") {
                setKnown(null);
                field.onChange(null);
                onChoose?.(null);
              }
            }}
            onKeyDown={onKeyDown}
            onBlur={leave}
          />
          {isOpen && (
            <div className="combobox-list" id={listId} role="listbox" aria-label={i18n.t("Found")}>
              {choices.map((choice, index) => (
                <div
                  key={choice.value}
                  id={`${listId}-${index}`}
                  className="combobox-option"
                  role="option"
                  tabIndex={-1}
                  aria-selected={index === active}
                  // The field would lose the focus, and with it the list, before the click.
                  onPointerDown={(event) => event.preventDefault()}
                  onPointerEnter={() => setActive(index)}
                  onClick={() => choose(choice)}
                  onKeyDown={undefined}
                >
                  {choice.label}
                  {choice.note && <span className="beneath block">{choice.note}</span>}
                </div>
              ))}
              {choices.length === 0 && (
                <p className="combobox-note" role="status">
                  {found.state === "failed"
                    ? problemText(i18n, found.error)
                    : found.state === "looking"
                      ? i18n.t("Looking…")
                      : i18n.t("Nobody and nothing by that name or number.")}
                </p>
              )}
            </div>
          )}
        </div>
      )}
    </Field>
  );
}
