import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { VisitorView } from "../../../shared/schemas/visitor";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useEndVisit } from "./queries";

/** Asks once, then ends a visit before its time. */
export function EndVisit({ visitor }: { visitor: VisitorView }) {
  const { i18n } = useLingui();
  const [isAsking, setIsAsking] = useState(false);
  const close = () => {
    setIsAsking(false);
    visit.reset();
  };
  const visit = useEndVisit(visitor.id, () => setIsAsking(false));
  return (
    <>
      <TextButton onClick={() => setIsAsking(true)}>
        {i18n.t("End")}
        <span className="sr-only"> {visitor.name}</span>
      </TextButton>
      <Dialog
        isOpen={isAsking}
        onClose={close}
        title={i18n.t("End the visit of {name} now?", { name: visitor.name })}
        lead={i18n.t("It ends at their next click. Files they have taken stay with them.")}
        actions={
          <>
            <Button kind="primary" isBusy={visit.isPending} onClick={visit.start}>
              {i18n.t("End the visit")}
            </Button>
            <Button onClick={close}>{i18n.t("Leave as it was")}</Button>
          </>
        }
      >
        {visit.isError && <FormProblem error={visit.error} />}
      </Dialog>
    </>
  );
}
