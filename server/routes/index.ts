import type { Config } from "../config";
import { defineAreaRoutes } from "./areas";
import { defineAssignmentRoutes } from "./assignments";
import { defineAuditRoutes } from "./audit-events";
import { defineCrewRoutes } from "./crews";
import { defineDayEntryRoutes } from "./day-entry";
import { defineDayRoutes } from "./days";
import { defineEvaluateRoutes } from "./evaluate";
import { defineExportRoutes } from "./exports";
import { defineFindingRoutes } from "./findings";
import { defineImportRoutes } from "./imports";
import { defineInstrumentRoutes } from "./instruments";
import { defineJobRoutes } from "./jobs";
import { defineNoticeRoutes } from "./notices";
import { definePreviewRoutes } from "./previews";
import { defineProtectorRoutes } from "./protectors";
import { defineRuleSetRoutes } from "./rule-sets";
import { defineRunRoutes } from "./runs";
import { defineSearchRoutes } from "./search";
import { defineSiteRoutes } from "./sites";
import { defineTaskRoutes } from "./tasks";
import { defineUserRoutes } from "./users";
import { defineWorkerRoutes } from "./workers";

/** Every resource's routes, declared once per process. */
export function defineRoutes(config: Config<"web">): void {
  defineEvaluateRoutes();
  defineExportRoutes(config);
  defineDayEntryRoutes();
  defineDayRoutes();
  defineFindingRoutes();
  defineNoticeRoutes(config);
  defineRunRoutes();
  defineAreaRoutes();
  defineAssignmentRoutes();
  defineAuditRoutes();
  defineCrewRoutes();
  defineImportRoutes();
  defineInstrumentRoutes();
  defineJobRoutes();
  definePreviewRoutes();
  defineProtectorRoutes();
  defineRuleSetRoutes();
  defineSearchRoutes();
  defineSiteRoutes();
  defineTaskRoutes();
  defineUserRoutes();
  defineWorkerRoutes();
}
