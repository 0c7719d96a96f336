import type { DutyItem } from "../../../shared/schemas/duty";
import { paths } from "../../paths";

/** Where a duty is done. */
export function dutyPath({ kind, targetId }: DutyItem): string {
  switch (kind) {
    case "finding":
    case "measure":
      return paths.finding(targetId);
    case "notice":
      return paths.letter(targetId);
    case "monitoring":
      return paths.workplaceChanges;
    case "calibration":
      return paths.instrument(targetId);
    case "fit-test":
      return paths.fittingOf(targetId);
    case "cushions":
    case "training":
      return paths.worker(targetId);
  }
}
