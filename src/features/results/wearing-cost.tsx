import { useLingui } from "@lingui/react";
import { useMemo } from "react";
import { removalCosts } from "../../../shared/acoustics/removal-costs";
import type { DayInput, RuleSetVersion } from "../../../shared/acoustics/types";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { useLocale } from "../../lib/i18n";

/** Less is shown as 0.0, and is no cost to speak of. */
const LEAST_DB = 0.05;

/** What taking the protector off cost at the ear that day, task by task; nothing where that is not known. */
export function WearingCost({
  input,
  governing,
  isOwn = false,
}: {
  input: DayInput;
  governing: RuleSetVersion;
  /** Said to the worker whose day it is. */
  isOwn?: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const costs = useMemo(() => removalCosts(input, governing), [input, governing]);
  const shown = costs?.tasks.filter(({ costDb }) => costDb >= LEAST_DB) ?? [];
  if (!costs || shown.length === 0) return null;
  const level = formatLevel(costs.throughoutDb, locale);
  return (
    <div className="wearing-cost">
      {shown.map(({ taskId, taskName, offMin, costDb }) => {
        const values = {
          time: offMin < 1 ? i18n.t("Less than a minute") : formatDuration(offMin, locale),
          task: taskName,
          cost: formatLevel(costDb, locale),
        };
        return (
          <p key={taskId}>
            {isOwn
              ? i18n.t("{time} without it in {task} cost you {cost} dB.", values)
              : i18n.t("{time} without it in {task} cost {cost} dB at the ear.", values)}
          </p>
        );
      })}
      <p>
        {isOwn
          ? i18n.t("Worn all the time, {level} dB would have reached your ear.", { level })
          : i18n.t("Worn throughout, {level} dB would have reached the ear.", { level })}
        {costs.isBesideCredit && ` ${i18n.t("That is with the active part off.")}`}
      </p>
    </div>
  );
}
