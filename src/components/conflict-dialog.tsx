import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import type { Conflict } from "../lib/revised-save";
import { isSameValue } from "../lib/same-value";
import { Button } from "./button";
import { Dialog } from "./dialog";

export interface ConflictField<Body> {
  readonly key: keyof Body & string;
  readonly label: string;
  readonly show: (value: Body) => ReactNode;
}

/** Two people met on one record: both versions, and a choice field by field where they differ. */
export function ConflictDialog<Body extends object, View extends { revision: number }>({
  title,
  conflict,
  toBody,
  savedBy,
  fields,
  onSave,
  onKeepSaved,
  onClose,
  isSaving,
}: {
  title: string;
  conflict: Conflict<Body, View>;
  /** The saved record as it would have been sent. */
  toBody: (saved: View) => Body;
  /** Who saved it and when, where the record says so: "S. Ferrand, 8 October 14:02". */
  savedBy?: (saved: View) => string;
  fields: readonly ConflictField<Body>[];
  onSave: (chosen: Body, revision: number) => void;
  onKeepSaved: (saved: View) => void;
  onClose: () => void;
  isSaving: boolean;
}) {
  const { i18n } = useLingui();
  const { mine, saved } = conflict;
  const theirs = toBody(saved);
  const [takesSaved, setTakesSaved] = useState<ReadonlySet<string>>(new Set());
  const differs = (key: keyof Body) => !isSameValue(mine[key], theirs[key]);
  const choose = (key: string, isSaved: boolean) =>
    setTakesSaved((before) => {
      const next = new Set(before);
      if (isSaved) next.add(key);
      else next.delete(key);
      return next;
    });
  const chosen = { ...mine };
  for (const { key } of fields) if (takesSaved.has(key)) chosen[key] = theirs[key];
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={title}
      lead={[
        savedBy?.(saved) && i18n.t("Saved by {who}.", { who: savedBy(saved) }),
        i18n.t("Nothing of yours is lost; choose what stands."),
      ]
        .filter(Boolean)
        .join(" ")}
      actions={
        <>
          <Button kind="primary" isBusy={isSaving} onClick={() => onSave(chosen, saved.revision)}>
            {i18n.t("Save as chosen, revision {number}", { number: saved.revision + 1 })}
          </Button>
          <Button onClick={() => onKeepSaved(saved)}>
            {i18n.t("Keep revision {number}", { number: saved.revision })}
          </Button>
        </>
      }
    >
      <table className="data-table conflict-table">
        <thead>
          <tr>
            <th scope="col">
              <span className="sr-only">{i18n.t("Field")}</span>
            </th>
            <th scope="col">{i18n.t("Yours")}</th>
            <th scope="col">{i18n.t("Saved, revision {number}", { number: saved.revision })}</th>
          </tr>
        </thead>
        <tbody>
          {fields.map(({ key, label, show }) => {
            const side = (isSaved: boolean, body: Body) =>
              differs(key) ? (
                <label className="conflict-choice">
                  <input
                    type="radio"
                    name={`conflict-${key}`}
                    checked={takesSaved.has(key) === isSaved}
                    onChange={() => choose(key, isSaved)}
                  />
                  <span className={takesSaved.has(key) === isSaved ? "is-chosen" : undefined}>
                    {show(body)}
                  </span>
                </label>
              ) : (
                show(body)
              );
            return (
              <tr key={key}>
                <th scope="row">{label}</th>
                <td>{side(false, mine)}</td>
                <td>{side(true, theirs)}</td>
              </tr>
            );
          })}
        </tbody>
      </table>
    </Dialog>
  );
}
