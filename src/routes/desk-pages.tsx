import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useState } from "react";
import { matchRoutes, type RouteObject, useRoutes } from "react-router-dom";
import { measuringRoutes } from "./measuring-routes";
import { type LoadPage, pageRoute, withWords } from "./page-loading";
import { registerRoutes } from "./register-routes";

function createDeskRoutes(i18n: I18n): RouteObject[] {
  const routes = [
    withWords(i18n, ["register", "office", "rules"], registerRoutes, [
      "officer",
      "auditor",
      "supervisor",
    ]),
    withWords(i18n, ["measuring", "register", "office", "rules"], measuringRoutes, [
      "officer",
      "auditor",
    ]),
    pageRoute("*", () => import("./not-found")),
  ];
  for (const { route } of matchRoutes(routes, window.location) ?? [])
    (route.handle as LoadPage | undefined)?.().catch(() => undefined);
  return routes;
}

/** Pages of the desk, which are nobody's first: a worker's phone does not load where they lie. */
export function Component() {
  const { i18n } = useLingui();
  const [routes] = useState(() => createDeskRoutes(i18n));
  return useRoutes(routes);
}
