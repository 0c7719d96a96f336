import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { UserView } from "../../../shared/schemas/user";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { FormProblem } from "../../components/form-problem";
import { useEndAccess } from "./queries";

/** Asks once, then ends somebody's access at their next request. */
export function EndAccess({ person, onEnded }: { person: UserView; onEnded: () => void }) {
  const { i18n } = useLingui();
  const [isAsking, setIsAsking] = useState(false);
  const end = useEndAccess(person.id, onEnded);
  const close = () => {
    setIsAsking(false);
    end.reset();
  };
  return (
    <>
      <Button onClick={() => setIsAsking(true)}>{i18n.t("End access")}</Button>
      <Dialog
        isOpen={isAsking}
        onClose={close}
        title={i18n.t("End the access of {name}?", { name: person.name })}
        lead={i18n.t(
          "It ends at their next click. What they recorded stays; they can be given access anew.",
        )}
        actions={
          <>
            <Button
              kind="primary"
              isBusy={end.isPending}
              onClick={() => end.mutate(person.revision)}
            >
              {i18n.t("End access")}
            </Button>
            <Button onClick={close}>{i18n.t("Leave as it was")}</Button>
          </>
        }
      >
        {end.isError && <FormProblem error={end.error} />}
      </Dialog>
    </>
  );
}
