import { useLingui } from "@lingui/react";
import { apiAddress } from "../lib/api";

/** What goes along with protectors, on paper: a page for each worker in the worker's language, to be signed. */
export function SlipsLink({ workerIds }: { workerIds: readonly string[] }) {
  const { i18n } = useLingui();
  return (
    <a
      className="link"
      href={apiAddress(`/issue-slips.pdf?workerIds=${workerIds.join(",")}`)}
      download
    >
      {workerIds.length === 1 ? i18n.t("Issue slip (PDF)") : i18n.t("Issue slips (PDF)")}
    </a>
  );
}
