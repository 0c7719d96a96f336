import { useLingui } from "@lingui/react";
import { findingStateWord } from "../../../shared/findings/words";
import type { FindingView } from "../../../shared/schemas/finding";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import type { OrderStep } from "./queries";

/** Both versions of an order and a choice: nothing is written over. */
export function StaleOrder({
  current,
  step,
  workerName,
  onKeep,
  onSend,
  isBusy,
}: {
  current: FindingView;
  step: OrderStep;
  workerName: string;
  onKeep: () => void;
  onSend: () => void;
  isBusy: boolean;
}) {
  const { i18n } = useLingui();
  const last = current.steps.at(-1);
  const isOver =
    current.state === "closed" ||
    step.kind === "undo" ||
    (current.state === "done" && step.kind !== "comment");
  const mine =
    step.kind === "mark-done"
      ? i18n.t("Mark done")
      : step.kind === "cannot"
        ? i18n.t("Can’t, because: {text}", { text: step.text })
        : step.kind === "undo"
          ? i18n.t("Undo")
          : step.text;
  return (
    <Dialog
      isOpen
      onClose={onKeep}
      title={i18n.t("Someone was here before you")}
      lead={
        last?.authorName
          ? i18n.t("{name} changed this order. Nothing of yours is lost; choose what stands.", {
              name: last.authorName,
            })
          : i18n.t("This order has changed. Nothing of yours is lost; choose what stands.")
      }
      actions={
        <>
          {!isOver && (
            <Button kind="primary" size="supervisor" isBusy={isBusy} onClick={onSend}>
              {i18n.t("Send mine as well")}
            </Button>
          )}
          <Button size="supervisor" onClick={onKeep}>
            {i18n.t("Keep it as it is")}
          </Button>
        </>
      }
    >
      <table className="data-table">
        <thead>
          <tr>
            <th scope="col">{workerName}</th>
            <th scope="col">{i18n.t("Yours")}</th>
            <th scope="col">
              {i18n.t("Saved, revision {revision}", { revision: current.revision })}
            </th>
          </tr>
        </thead>
        <tbody>
          <tr>
            <th scope="row">{i18n.t("Order")}</th>
            <td>{mine}</td>
            <td>
              {findingStateWord(i18n, current.state)}
              {last?.text && <span className="beneath block">{last.text}</span>}
            </td>
          </tr>
        </tbody>
      </table>
    </Dialog>
  );
}
