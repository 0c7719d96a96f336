import { paths } from "../paths";
import type { PageRoute } from "./page-route";

export const registerRoutes: PageRoute[] = [
  {
    path: paths.protectors,
    lazy: () => import("./protectors-page"),
    roles: ["officer", "auditor"],
  },
  { path: paths.newProtector, lazy: () => import("./protector-form-page"), roles: ["officer"] },
  { path: paths.fitting, lazy: () => import("./fitting-page"), roles: ["officer"] },
  { path: paths.fittingOf(":workerId"), lazy: () => import("./fitting-page"), roles: ["officer"] },
  { path: paths.choose, lazy: () => import("./choose-page"), roles: ["officer", "auditor"] },
  { path: "/protectors/slips", lazy: () => import("./slips-page"), roles: ["officer", "auditor"] },
  { path: paths.fits, lazy: () => import("./fits-page"), roles: ["officer", "auditor"] },
  {
    path: paths.signals,
    lazy: () => import("./protector-signals-page"),
    roles: ["officer", "auditor"],
  },
  {
    path: paths.newSignal,
    lazy: () => import("./protector-signal-form-page"),
    roles: ["officer"],
  },
  {
    path: paths.signal(":id"),
    lazy: () => import("./protector-signal-page"),
    roles: ["officer", "auditor"],
  },
  { path: paths.stock, lazy: () => import("./stock-page"), roles: ["officer", "auditor"] },
  { path: paths.wearing, lazy: () => import("./wearing-page") },
  {
    path: paths.wearingRound,
    lazy: () => import("./wearing-round-page"),
    roles: ["officer", "supervisor"],
  },
  { path: paths.myDay(":date"), lazy: () => import("./wearing-day-page"), roles: ["worker"] },
  { path: paths.protector(":id"), lazy: () => import("./protector-page") },
  { path: paths.tasks, lazy: () => import("./tasks-page") },
  { path: paths.task(":id"), lazy: () => import("./task-page") },
  { path: paths.plans, lazy: () => import("./plans-page"), roles: ["officer", "auditor"] },
  { path: paths.tryChanges, lazy: () => import("./try-changes-page"), roles: ["officer"] },
  { path: paths.plan(":id"), lazy: () => import("./plan-page"), roles: ["officer", "auditor"] },
  { path: paths.rules, lazy: () => import("./rules-page"), roles: ["officer", "auditor"] },
  { path: paths.site(":id"), lazy: () => import("./site-rules-page") },
  { path: paths.areas, lazy: () => import("./areas-page") },
  { path: paths.zoneSign(":id"), lazy: () => import("./zone-sign-page") },
  { path: paths.jobs, lazy: () => import("./jobs-page") },
  { path: paths.crews, lazy: () => import("./crews-page") },
  { path: paths.crew(":id"), lazy: () => import("./crew-page") },
  { path: paths.roster, lazy: () => import("./import-roster-page"), roles: ["officer"] },
  { path: paths.imports, lazy: () => import("./import-page"), roles: ["officer"] },
];
