import { paths } from "../paths";
import type { PageRoute } from "./page-route";

export const peopleRoutes: PageRoute[] = [
  { path: paths.crewSheet, lazy: () => import("./crew-sheet-page") },
  { path: paths.crewSheetOf(":crewId"), lazy: () => import("./crew-sheet-page") },
  { path: paths.yearFile, lazy: () => import("./year-file-page") },
  { path: paths.trail, lazy: () => import("./trail-page") },
  { path: paths.people, lazy: () => import("./people-page") },
  { path: paths.person(":id"), lazy: () => import("./person-page") },
  { path: paths.sites, lazy: () => import("./sites-page") },
];
