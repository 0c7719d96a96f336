import { type ComponentProps, useState } from "react";
import { fieldNumber, parseNumber } from "../../shared/format/number";
import { useLocale } from "../lib/i18n";
import { Unreadable } from "./form";

/** A number, nothing, or what can't be read as one and stays as typed. */
export type Typed = number | null | Unreadable;

/** One number among several that make up a field; the field's own label and error stand around it. */
export function NumberInput({
  value,
  onValue,
  className = "input is-number",
  ...props
}: Omit<ComponentProps<"input">, "value" | "onChange"> & {
  value: Typed | undefined;
  onValue: (value: Typed) => void;
}) {
  const locale = useLocale();
  const [typed, setTyped] = useState<{ text: string; value: Typed } | null>(null);
  const written = value instanceof Unreadable ? value.text : fieldNumber(value ?? null, locale);
  return (
    <input
      inputMode="decimal"
      autoComplete="off"
      {...props}
      className={className}
      value={typed && Object.is(typed.value, value) ? typed.text : written}
      onChange={(event) => {
        const text = event.target.value;
        const parsed = parseNumber(text, locale);
        const next: Typed =
          parsed.kind === "ok"
            ? parsed.value
            : parsed.kind === "empty"
              ? null
              : new Unreadable(parsed.kind === "ambiguous" ? "ambiguous" : "not-a-number", text);
        setTyped({ text, value: next });
        onValue(next);
      }}
      onBlur={(event) => {
        setTyped(null);
        props.onBlur?.(event);
      }}
    />
  );
}
