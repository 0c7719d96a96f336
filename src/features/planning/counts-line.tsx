import { useLingui } from "@lingui/react";
import type { Verdict as VerdictCode } from "../../../shared/acoustics/types";
import type { VerdictCounts } from "../../../shared/planning/try-changes";
import { Verdict } from "../../components/verdict";

const ORDER: readonly VerdictCode[] = ["over", "cant-tell-yet", "under", "not-assessed"];

/** How many are where, as it is and with the changes: "◆ Over 4 → 0". */
export function CountsLine({ before, after }: { before: VerdictCounts; after: VerdictCounts }) {
  const { i18n } = useLingui();
  return (
    <ul className="counts-line" aria-label={i18n.t("People, as it is and with the changes")}>
      {ORDER.filter((verdict) => before[verdict] + after[verdict] > 0).map((verdict) => (
        <li key={verdict}>
          <Verdict verdict={verdict} isQuiet />{" "}
          <span className="mono">
            {before[verdict]}
            <span aria-hidden="true"> → </span>
            <span className="sr-only"> {i18n.t("now, then")} </span>
            {after[verdict]}
          </span>
        </li>
      ))}
    </ul>
  );
}
