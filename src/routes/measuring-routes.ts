import type { PageRoute } from "./page-route";

export const measuringRoutes: PageRoute[] = [];
