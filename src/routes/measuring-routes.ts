import { paths } from "../paths";
import type { PageRoute } from "./page-route";

/** Who reads runs and instruments, beside the office. */
const READERS = ["officer", "auditor", "supervisor"] as const;

export const measuringRoutes: PageRoute[] = [
  { path: paths.toMeasure, lazy: () => import("./to-measure-page") },
  { path: paths.workplaceChanges, lazy: () => import("./workplace-changes-page") },
  { path: paths.protectorsBefore(":id"), lazy: () => import("./protectors-before-page") },
  { path: paths.surveys, lazy: () => import("./surveys-page") },
  { path: paths.newSurvey, lazy: () => import("./survey-form-page"), roles: ["officer"] },
  { path: paths.survey(":id"), lazy: () => import("./survey-page") },
  { path: paths.changeSurvey(":id"), lazy: () => import("./survey-form-page"), roles: ["officer"] },
  { path: paths.group(":jobId"), lazy: () => import("./group-page") },
  { path: paths.outAndBack, lazy: () => import("./out-and-back-page") },
  { path: paths.sample, lazy: () => import("./sample-page"), roles: ["officer"] },
  { path: paths.runs, lazy: () => import("./runs-page"), roles: READERS },
  { path: paths.newRun, lazy: () => import("./run-page"), roles: ["officer"] },
  {
    path: paths.run(":id"),
    lazy: () => import("./run-page"),
    roles: [...READERS, "visitor"],
  },
  { path: paths.instruments, lazy: () => import("./instruments-page"), roles: READERS },
  { path: paths.instrument(":id"), lazy: () => import("./instrument-page"), roles: READERS },
  { path: paths.historyImports, lazy: () => import("./history-imports-page") },
  { path: paths.history(":id"), lazy: () => import("./history-page") },
  { path: paths.historyImport(":id"), lazy: () => import("./history-import-page") },
  {
    path: paths.microphoneCheck(":id"),
    lazy: () => import("./microphone-check-page"),
  },
  {
    path: paths.microphoneResult(":id", ":checkId"),
    lazy: () => import("./microphone-result-page"),
  },
  { path: paths.recordings, lazy: () => import("./recordings-page") },
  { path: paths.recording(":id"), lazy: () => import("./recording-page") },
];
