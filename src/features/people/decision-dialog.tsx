import { useLingui } from "@lingui/react";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { FormProblem } from "../../components/form-problem";
import type { useDecision } from "./retention-queries";

export type Decision = "approval" | "withdrawal";

interface Asked {
  readonly title: string;
  readonly lead: string;
  /** On the button. */
  readonly act: string;
}

/** Asks once before what somebody proposed is approved or withdrawn. */
export function DecisionDialog({
  asking,
  decide,
  asks,
  onClose,
}: {
  asking: Decision | null;
  decide: ReturnType<typeof useDecision>;
  asks: Readonly<Record<Decision, Asked>>;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const close = () => {
    onClose();
    decide.reset();
  };
  // While it closes it has no words of its own any more.
  const { title, lead, act } = asks[asking ?? "withdrawal"];
  return (
    <Dialog
      isOpen={asking !== null}
      onClose={close}
      title={title}
      lead={lead}
      actions={
        <>
          <Button
            kind="primary"
            isBusy={decide.isPending}
            onClick={() => asking !== null && decide.start(asking)}
          >
            {act}
          </Button>
          <Button onClick={close}>{i18n.t("Leave as it was")}</Button>
        </>
      }
    >
      {decide.isError && <FormProblem error={decide.error} />}
    </Dialog>
  );
}
