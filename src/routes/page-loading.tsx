import type { I18n } from "@lingui/core";
import { type ComponentType, use } from "react";
import type { RouteObject } from "react-router-dom";
import { addCatalogue, type CataloguePart } from "../../shared/i18n";
import type { SessionRole } from "../../shared/schemas/session";
import { hasRole, useUser } from "../features/session/session";
import type { PageRoute } from "./page-route";

interface PageModule {
  Component: ComponentType;
}
export type LoadPage = () => Promise<PageModule>;

/** Asks once for what it loads; after a failure again. */
export function once(load: LoadPage): LoadPage {
  let loading: Promise<PageModule> | null = null;
  return () => {
    loading ??= load().catch((error: unknown) => {
      loading = null;
      throw error;
    });
    return loading;
  };
}

/** One component for all pages: two addresses of one page keep what is in it. */
export function LazyPage({ load }: { load: LoadPage }) {
  const { Component } = use(load());
  return <Component />;
}

export const pageRoute = (path: string, load: LoadPage): RouteObject => {
  const loadOnce = once(load);
  return { path, handle: loadOnce, element: <LazyPage load={loadOnce} /> };
};

const loadNotFound = once(() => import("./not-found"));

/** Somebody else's page is not there: no frame with buttons that the server would refuse. */
function Guarded({ roles, load }: { roles: readonly SessionRole[]; load: LoadPage }) {
  return <LazyPage load={hasRole(useUser(), ...roles) ? load : loadNotFound} />;
}

/** Pages that need further parts of the catalogue than everybody's. */
export const withWords = (
  i18n: I18n,
  parts: readonly CataloguePart[],
  pages: readonly PageRoute[],
  roles: readonly SessionRole[],
): RouteObject => ({
  children: pages.map(({ path, lazy, roles: ofPage = roles }) => {
    const load = once(async () => {
      const [page] = await Promise.all([lazy(), ...parts.map((part) => addCatalogue(i18n, part))]);
      return page;
    });
    return { path, handle: load, element: <Guarded roles={ofPage} load={load} /> };
  }),
});
