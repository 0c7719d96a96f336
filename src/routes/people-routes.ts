import { paths } from "../paths";
import type { PageRoute } from "./page-route";

export const peopleRoutes: PageRoute[] = [
  {
    path: paths.crewSheet,
    lazy: () => import("./crew-sheet-page"),
    roles: ["supervisor", "officer", "auditor"],
  },
  {
    path: paths.crewSheetOf(":crewId"),
    lazy: () => import("./crew-sheet-page"),
    roles: ["supervisor", "officer", "auditor"],
  },
  {
    path: paths.crewPeople(":crewId"),
    lazy: () => import("./crew-people-page"),
    roles: ["supervisor", "officer"],
  },
  {
    path: paths.handOvers(":crewId"),
    lazy: () => import("./hand-over-page"),
    roles: ["supervisor", "officer", "auditor"],
  },
  {
    path: paths.siteFigures,
    lazy: () => import("./site-figures-page"),
    roles: ["representative"],
  },
  {
    path: paths.yearFile,
    lazy: () => import("./year-file-page"),
    roles: ["auditor", "officer", "visitor"],
  },
  {
    path: paths.draw(":id"),
    lazy: () => import("./draw-page"),
    roles: ["auditor", "officer"],
  },
  {
    path: paths.trail,
    lazy: () => import("./trail-page"),
    roles: ["auditor", "administrator", "visitor"],
  },
  {
    path: paths.workerAccess(":id"),
    lazy: () => import("./record-access-page"),
    roles: ["officer", "supervisor", "auditor", "visitor"],
  },
  {
    path: paths.reads,
    lazy: () => import("./reads-page"),
    roles: ["auditor", "administrator"],
  },
  {
    path: paths.account,
    lazy: () => import("./account-page"),
    roles: [
      "officer",
      "supervisor",
      "worker",
      "auditor",
      "administrator",
      "representative",
      "visitor",
      "employer",
    ],
  },
  { path: paths.trailCheck, lazy: () => import("./trail-check-page"), roles: ["auditor"] },
  {
    path: paths.trailHead,
    lazy: () => import("./trail-head-page"),
    roles: ["auditor", "administrator"],
  },
  { path: paths.people, lazy: () => import("./people-page"), roles: ["administrator"] },
  { path: paths.groups, lazy: () => import("./groups-page"), roles: ["administrator"] },
  {
    path: paths.employerShares,
    lazy: () => import("./employer-shares-page"),
    roles: ["officer", "administrator"],
  },
  {
    path: paths.sharedResults,
    lazy: () => import("./shared-results-page"),
    roles: ["employer"],
  },
  {
    path: paths.retention,
    lazy: () => import("./retention-page"),
    roles: ["administrator", "officer"],
  },
  { path: paths.visitors, lazy: () => import("./visitors-page"), roles: ["administrator"] },
  { path: paths.person(":id"), lazy: () => import("./person-page"), roles: ["administrator"] },
  { path: paths.sites, lazy: () => import("./sites-page"), roles: ["administrator"] },
];
