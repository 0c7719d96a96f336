import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { MappingView } from "../../../shared/schemas/group-mapping";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Dialog } from "../../components/dialog";
import { Empty } from "../../components/empty";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useEndMapping } from "./queries";
import { grantWords } from "./role-words";

/** Asks once: everybody who has the role by the group alone loses it at their next click. */
function EndMapping({ mapping }: { mapping: MappingView }) {
  const { i18n } = useLingui();
  const [isAsking, setIsAsking] = useState(false);
  const end = useEndMapping(mapping.id, () => setIsAsking(false));
  const close = () => {
    setIsAsking(false);
    end.reset();
  };
  return (
    <>
      <TextButton onClick={() => setIsAsking(true)}>
        {i18n.t("End")}
        <span className="sr-only"> {mapping.groupName}</span>
      </TextButton>
      <Dialog
        isOpen={isAsking}
        onClose={close}
        title={i18n.t("End the role of {group}?", { group: mapping.groupName })}
        lead={i18n.t(
          "{people, plural, =0 {Nobody has it by this group now.} one {One person loses it at their next click.} other {# people lose it at their next click.}}",
          { people: mapping.people },
        )}
        actions={
          <>
            <Button kind="primary" isBusy={end.isPending} onClick={end.start}>
              {i18n.t("End the role")}
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

/** Which group of the sign-in service gives which role. */
export function GroupsTable({
  mappings,
  state,
  error,
  onRetry,
}: {
  mappings: readonly MappingView[];
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
}) {
  const { i18n } = useLingui();
  const columns: DataColumn<MappingView>[] = [
    {
      id: "group",
      head: i18n.t("Group"),
      isRowHead: true,
      cell: ({ groupName }) => <bdi>{groupName}</bdi>,
    },
    {
      id: "role",
      head: i18n.t("Role"),
      cell: ({ role, siteName }) => grantWords(i18n, { role, siteName }),
    },
    { id: "people", head: i18n.t("People"), kind: "figure", cell: ({ people }) => people },
    {
      id: "end",
      head: <span className="sr-only">{i18n.t("What to do")}</span>,
      cell: (mapping) => <EndMapping mapping={mapping} />,
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Roles by group")}
      columns={columns}
      rows={mappings}
      rowKey={({ id }) => id}
      state={state}
      error={error}
      onRetry={onRetry}
      empty={<Empty title={i18n.t("No group has a role.")} />}
    />
  );
}
