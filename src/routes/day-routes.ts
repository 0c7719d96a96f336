import { paths } from "../paths";
import type { PageRoute } from "./page-route";

export const dayRoutes: PageRoute[] = [
  { path: paths.days, lazy: () => import("./days-page") },
  { path: paths.day(":crewId", ":date"), lazy: () => import("./day-page") },
];
