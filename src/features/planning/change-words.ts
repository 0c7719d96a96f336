import type { I18n } from "@lingui/core";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import type { PlanChange } from "../../../shared/schemas/plan";

/** A change as a sentence. `nameOf` gives the name of a task, a worker or a protector. */
export function changeSentence(
  i18n: I18n,
  locale: Locale,
  change: PlanChange,
  nameOf: (id: string) => string,
): string {
  const name = (id: string) => isolate(nameOf(id));
  switch (change.kind) {
    case "noise":
      if (change.byDb !== null && change.byDb < 0)
        return i18n.t("{task} louder by {amount} dB at its source", {
          task: name(change.taskId),
          amount: formatLevel(-change.byDb, locale),
        });
      return change.bandsDb === null
        ? i18n.t("{task} quieter by {amount} dB at its source", {
            task: name(change.taskId),
            amount: formatLevel(change.byDb ?? 0, locale),
          })
        : i18n.t("{task} quieter at its source by bands: {bands}", {
            task: name(change.taskId),
            bands: change.bandsDb
              .flatMap((byDb, band) =>
                byDb
                  ? [
                      i18n.t("{hz} Hz {amount} dB", {
                        hz: OCTAVE_BANDS_HZ[band] ?? 0,
                        amount: formatLevel(byDb, locale),
                      }),
                    ]
                  : [],
              )
              .join(", "),
          });
    case "duration":
      return i18n.t("{task} for {time} a shift; the difference goes to {other}", {
        task: name(change.taskId),
        time: formatDuration(change.durationMin, locale),
        other: name(change.otherTaskId),
      });
    case "rotation":
      return i18n.t(
        "{worker} gives {time} of {task} to {otherWorker}, and takes as much of {otherTask}",
        {
          worker: name(change.workerId),
          time: formatDuration(change.minutes, locale),
          task: name(change.taskId),
          otherWorker: name(change.otherWorkerId),
          otherTask: name(change.otherTaskId),
        },
      );
    case "protector": {
      const protector = [change.innerModelId, change.outerModelId]
        .flatMap((id) => (id === null ? [] : [nameOf(id)]))
        .join(" + ");
      const who =
        change.workerIds === null
          ? i18n.t("everybody")
          : change.workerIds.map((id) => name(id)).join(", ");
      return change.taskId === null
        ? i18n.t("{protector} everywhere in noise: {who}", { protector, who })
        : i18n.t("{protector} in {task}: {who}", { protector, task: name(change.taskId), who });
    }
    case "wearing":
      return change.taskId === null
        ? i18n.t("Protectors worn for {share} % of every task", {
            share: formatNumber(change.wornPct, 0, locale),
          })
        : i18n.t("Protectors worn for {share} % of {task}", {
            share: formatNumber(change.wornPct, 0, locale),
            task: name(change.taskId),
          });
  }
}

export const CHANGE_KINDS = ["noise", "duration", "rotation", "protector", "wearing"] as const;

export function changeKindWord(i18n: I18n, kind: PlanChange["kind"]): string {
  switch (kind) {
    case "noise":
      return i18n.t("Less noise at a source");
    case "duration":
      return i18n.t("A shorter or longer task");
    case "rotation":
      return i18n.t("Two people share tasks");
    case "protector":
      return i18n.t("Another protector");
    case "wearing":
      return i18n.t("Worn more, or less");
  }
}
