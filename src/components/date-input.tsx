import { type InputHTMLAttributes, useRef, useState } from "react";
import { formatLongDay } from "../../shared/format/date";
import { useLocale } from "../lib/i18n";

/**
 * The browser's own field for a date, which writes it as the browser's language has it. Beside it stands the date in the
 * reader's own: 3/12 and 12/3 are told apart there. A date picked is chosen at once; one that is typed part by part, once
 * Enter is pressed or the field is left, for on the way there every digit makes another date.
 */
export function DateInput({
  value = "",
  onChoose,
  className = "",
  ...props
}: Omit<
  InputHTMLAttributes<HTMLInputElement>,
  "type" | "value" | "defaultValue" | "onChange" | "onBlur" | "onKeyDown"
> & { value?: string; onChoose: (isoDate: string) => void }) {
  const locale = useLocale();
  const [shown, setShown] = useState(value);
  const isTyped = useRef(false);
  const choose = (date: string) => {
    isTyped.current = false;
    if (date !== "" && date !== value) onChoose(date);
  };
  return (
    <>
      <input
        {...props}
        type="date"
        className={`input is-date ${className}`}
        value={shown}
        onKeyDown={(event) => {
          if (event.key === "Enter") choose(shown);
          else if (event.key !== "Tab") isTyped.current = true;
        }}
        onChange={(event) => {
          setShown(event.target.value);
          if (!isTyped.current) choose(event.target.value);
        }}
        onBlur={() => {
          if (isTyped.current) choose(shown);
        }}
      />
      {shown !== "" && <span className="date-words">{formatLongDay(shown, locale)}</span>}
    </>
  );
}
