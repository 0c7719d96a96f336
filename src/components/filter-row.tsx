import { type ReactNode, useId } from "react";
import { DateInput } from "./date-input";
import type { Choice } from "./form";
import "../styles/filter-row.css";

/** What narrows a list, in one line above it. */
export function FilterRow({ label, children }: { label: string; children: ReactNode }) {
  return (
    <search className="filter-row" aria-label={label}>
      {children}
    </search>
  );
}

export function FilterSelect({
  label,
  value,
  choices,
  onChange,
}: {
  label: string;
  value: string;
  choices: readonly Choice[];
  onChange: (value: string) => void;
}) {
  const id = useId();
  return (
    <span className="filter">
      <label htmlFor={id}>{label}</label>
      <select
        id={id}
        className="input"
        value={value}
        onChange={(event) => onChange(event.target.value)}
      >
        {choices.map((choice) => (
          <option key={choice.value} value={choice.value}>
            {choice.label}
          </option>
        ))}
      </select>
    </span>
  );
}

export function FilterText({
  label,
  value,
  onChange,
}: {
  label: string;
  value: string;
  onChange: (value: string) => void;
}) {
  const id = useId();
  return (
    <span className="filter">
      <label htmlFor={id}>{label}</label>
      <input
        id={id}
        type="search"
        className="input"
        autoComplete="off"
        value={value}
        onChange={(event) => onChange(event.target.value)}
      />
    </span>
  );
}

/** A first or a last day; empty: it narrows nothing. */
export function FilterDate({
  label,
  value,
  onChoose,
}: {
  label: string;
  /** ISO date, or empty. */
  value: string;
  onChoose: (isoDate: string) => void;
}) {
  const id = useId();
  return (
    <span className="filter">
      <label htmlFor={id}>{label}</label>
      <DateInput id={id} value={value} onChoose={onChoose} />
    </span>
  );
}

export function FilterCheck({
  label,
  isChecked,
  onChange,
}: {
  label: string;
  isChecked: boolean;
  onChange: (isChecked: boolean) => void;
}) {
  return (
    <label className="choice filter-check">
      <input
        type="checkbox"
        checked={isChecked}
        onChange={(event) => onChange(event.target.checked)}
      />
      <span>{label}</span>
    </label>
  );
}
