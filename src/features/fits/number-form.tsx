import { useLingui } from "@lingui/react";
import { useMutation } from "@tanstack/react-query";
import { type Ref, useId, useImperativeHandle, useRef, useState } from "react";
import type { FittingFound } from "../../../shared/schemas/fit";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { lookUp } from "./queries";

export interface NumberFormHandle {
  /** Ready for the next in the queue. */
  next(): void;
}

/** Who stands at the desk: typed or scanned, Enter, and on. A name finds too, and asks which one is meant. */
export function NumberForm({
  onFound,
  onNobody,
  ref,
}: {
  onFound: (workerId: string) => void;
  /** The number or name means nobody, or more than one: whoever stood here before is not meant. */
  onNobody: () => void;
  ref: Ref<NumberFormHandle>;
}) {
  const { i18n } = useLingui();
  const id = useId();
  const input = useRef<HTMLInputElement>(null);
  const [text, setText] = useState("");
  const [found, setFound] = useState<FittingFound["rows"] | null>(null);
  const [isMissing, setIsMissing] = useState(false);
  const ask = useMutation({
    mutationFn: lookUp,
    onSuccess: ({ rows }) => {
      const [only] = rows;
      if (only && rows.length === 1) choose(only.id);
      else {
        setFound(rows);
        onNobody();
        input.current?.select();
      }
    },
  });
  useImperativeHandle(ref, () => ({
    next() {
      setText("");
      setFound(null);
      setIsMissing(false);
      input.current?.focus();
    },
  }));

  function choose(workerId: string) {
    setFound(null);
    onFound(workerId);
  }

  return (
    <form
      className="number-form"
      aria-label={i18n.t("Who stands at the desk")}
      onSubmit={(event) => {
        event.preventDefault();
        const asked = text.trim();
        setIsMissing(asked === "");
        if (asked !== "" && !ask.isPending) ask.mutate(asked);
      }}
    >
      <label className="field-label" htmlFor={id}>
        {i18n.t("Employee number, or name")}
      </label>
      <span className="number-line">
        <input
          id={id}
          ref={input}
          className="input"
          autoComplete="off"
          // biome-ignore lint/a11y/noAutofocus: the page begins with it, and a scanner types at once
          autoFocus
          value={text}
          aria-invalid={isMissing || found?.length === 0 || undefined}
          aria-describedby={isMissing || found ? `${id}-found` : undefined}
          onChange={(event) => {
            setText(event.target.value);
            setFound(null);
            setIsMissing(false);
          }}
        />
        <Button type="submit" isBusy={ask.isPending}>
          {i18n.t("Find")}
        </Button>
      </span>
      <div id={`${id}-found`} role="status">
        {isMissing && <p className="field-error">{i18n.t("This is needed.")}</p>}
        {found?.length === 0 && (
          <>
            <p className="field-error">{i18n.t("Nobody here has this number or name.")}</p>
            <p className="beneath">
              {i18n.t("Is it typed as it stands under Workers, and at a site of yours?")}
            </p>
          </>
        )}
        {found && found.length > 0 && (
          <ul className="number-found">
            {found.map(({ id: workerId, name, employeeNumber, siteName }) => (
              <li key={workerId}>
                <TextButton onClick={() => choose(workerId)}>{name}</TextButton>{" "}
                <span className="beneath">{`${employeeNumber}, ${siteName}`}</span>
              </li>
            ))}
          </ul>
        )}
      </div>
      <FormProblem error={ask.error} />
    </form>
  );
}
