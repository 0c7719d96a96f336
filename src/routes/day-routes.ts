import type { RouteObject } from "react-router-dom";
import { paths } from "../paths";

export const dayRoutes: RouteObject[] = [
  { path: paths.days, lazy: () => import("./days-page") },
  { path: paths.day(":crewId", ":date"), lazy: () => import("./day-page") },
];
