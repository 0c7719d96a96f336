import { paths } from "../paths";
import type { PageRoute } from "./page-route";

/** Where an officer's day begins: apart, so that it loads no more than it needs. */
export const waitingRoutes: PageRoute[] = [
  { path: paths.waiting, lazy: () => import("./waiting-page") },
];

/** Who reads the records in their lists, beside those who meet a few of them. */
const READERS = ["officer", "auditor", "visitor"] as const;

export const officerRoutes: PageRoute[] = [
  { path: paths.duties, lazy: () => import("./duties-page"), roles: ["officer", "auditor"] },
  { path: paths.findings, lazy: () => import("./findings-page"), roles: READERS },
  { path: paths.finding(":id"), lazy: () => import("./finding-page") },
  { path: paths.letters, lazy: () => import("./letters-page"), roles: READERS },
  { path: paths.letter(":id"), lazy: () => import("./letter-page"), roles: READERS },
  {
    path: paths.employers,
    lazy: () => import("./employers-page"),
    roles: ["officer", "auditor"],
  },
  { path: paths.workers, lazy: () => import("./workers-page"), roles: READERS },
  { path: paths.newWorker, lazy: () => import("./worker-form-page"), roles: ["officer"] },
  { path: paths.changeWorker(":id"), lazy: () => import("./worker-form-page"), roles: ["officer"] },
  { path: paths.worker(":id"), lazy: () => import("./worker-page") },
  { path: paths.result(":id", ":date"), lazy: () => import("./result-page") },
  { path: paths.storedResult(":id"), lazy: () => import("./result-page") },
  { path: paths.shift(":id"), lazy: () => import("./shift-page") },
];
