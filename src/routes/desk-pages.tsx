import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
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

/** Made once: a page that still loads throws away what the component around it holds. */
const made = new WeakMap<I18n, RouteObject[]>();

/** Pages of the desk, which are nobody's first: a worker's phone does not load where they lie. */
export function Component() {
  const { i18n } = useLingui();
  const routes = made.get(i18n) ?? createDeskRoutes(i18n);
  made.set(i18n, routes);
  return useRoutes(routes);
}
