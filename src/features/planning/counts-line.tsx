import { useLingui } from "@lingui/react";
import type { Verdict as VerdictCode } from "../../../shared/acoustics/types";
import { Verdict } from "../../components/verdict";

export type Counts = Readonly<Record<VerdictCode, number>>;

const ORDER: readonly VerdictCode[] = ["over", "cant-tell-yet", "under", "not-assessed"];

export function countVerdicts(judged: readonly { verdict: VerdictCode }[]): Counts {
  const counts = { under: 0, over: 0, "cant-tell-yet": 0, "not-assessed": 0 };
  for (const { verdict } of judged) counts[verdict] += 1;
  return counts;
}

/** How many are where, as it is and with the changes: "◆ Over 4 → 0". */
export function CountsLine({ before, after }: { before: Counts; after: Counts }) {
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
