import type { I18n } from "@lingui/core";
import type { QueryClient } from "@tanstack/react-query";
import { type ComponentType, Suspense, use } from "react";
import {
  BrowserRouter,
  matchRoutes,
  Navigate,
  type RouteObject,
  useLocation,
  useRoutes,
} from "react-router-dom";
import { addCatalogue, type CataloguePart } from "../shared/i18n";
import type { RoleName } from "../shared/schemas/session";
import { hasRole, keepLanguage, sessionQuery, useUser } from "./features/session/session";
import { readAs } from "./lib/i18n";
import { paths } from "./paths";
import { dayRoutes } from "./routes/day-routes";
import { homeOf } from "./routes/home";
import { Loading } from "./routes/loading";
import { measuringRoutes } from "./routes/measuring-routes";
import { officerRoutes, waitingRoutes } from "./routes/officer-routes";
import type { PageRoute } from "./routes/page-route";
import { peopleRoutes } from "./routes/people-routes";
import { registerRoutes } from "./routes/register-routes";
import { RouteErrorBoundary } from "./routes/route-error";
import { SignedIn } from "./routes/signed-in";

interface PageModule {
  Component: ComponentType;
}
type LoadPage = () => Promise<PageModule>;

/** Asks once for what it loads; after a failure again. */
function once(load: LoadPage): LoadPage {
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
function LazyPage({ load }: { load: LoadPage }) {
  const { Component } = use(load());
  return <Component />;
}

const pageRoute = (path: string, load: LoadPage): RouteObject => {
  const loadOnce = once(load);
  return { path, handle: loadOnce, element: <LazyPage load={loadOnce} /> };
};

const loadNotFound = once(() => import("./routes/not-found"));

/** Somebody else's page is not there: no frame with buttons that the server would refuse. */
function Guarded({ roles, load }: { roles: readonly RoleName[]; load: LoadPage }) {
  return <LazyPage load={hasRole(useUser(), ...roles) ? load : loadNotFound} />;
}

function Home() {
  return <Navigate to={homeOf(useUser())} replace />;
}

function ToSignIn() {
  const { pathname, search } = useLocation();
  return (
    <Navigate to={`${paths.signIn}?returnTo=${encodeURIComponent(pathname + search)}`} replace />
  );
}

function ToNoAccess() {
  return <Navigate to={paths.noAccess} replace />;
}

/**
 * Plain routes, and not the router that also fetches data: that one is 19 kB more, a seventh of a worker's page, and the
 * queries fetch here.
 */
export function createRoutes(queryClient: QueryClient, i18n: I18n): RouteObject[] {
  /** Nobody signed in: to the sign-in page, and back here afterwards. Asked once; a session that ends later moves nobody. */
  const loadSignedIn = once(async () => {
    const { user, pendingName } = await queryClient.ensureQueryData(sessionQuery);
    if (!user) return { Component: pendingName ? ToNoAccess : ToSignIn };
    await readAs(i18n, user.language, keepLanguage);
    return { Component: SignedIn };
  });

  /** Pages that need further parts of the catalogue than everybody's. */
  const withWords = (
    parts: readonly CataloguePart[],
    pages: readonly PageRoute[],
    roles: readonly RoleName[],
  ): RouteObject => ({
    children: pages.map(({ path, lazy, roles: ofPage = roles }) => {
      const load = once(async () => {
        const [page] = await Promise.all([
          lazy(),
          ...parts.map((part) => addCatalogue(i18n, part)),
        ]);
        return page;
      });
      return { path, handle: load, element: <Guarded roles={ofPage} load={load} /> };
    }),
  });

  const routes: RouteObject[] = [
    pageRoute(paths.signIn, () => import("./routes/sign-in")),
    pageRoute(paths.signedOut, () => import("./routes/signed-out")),
    pageRoute(paths.noAccess, () => import("./routes/no-access")),
    {
      element: <LazyPage load={loadSignedIn} />,
      handle: loadSignedIn,
      children: [
        { index: true, element: <Home /> },
        {
          element: <RouteErrorBoundary />,
          children: [
            pageRoute(paths.me, () => import("./routes/me-page")),
            withWords(["office", "rules"], waitingRoutes, ["officer"]),
            withWords(["office", "rules"], officerRoutes, ["officer", "auditor", "supervisor"]),
            withWords(["day", "rules"], dayRoutes, ["officer"]),
            withWords(["register", "office", "rules"], registerRoutes, [
              "officer",
              "auditor",
              "supervisor",
            ]),
            withWords(["measuring", "register", "office", "rules"], measuringRoutes, [
              "officer",
              "auditor",
            ]),
            withWords(["people", "rules"], peopleRoutes, []),
            pageRoute("*", () => import("./routes/not-found")),
          ],
        },
      ],
    },
  ];

  // The first page loads while the session is asked for, and not after it. What fails is said where it is shown.
  for (const { route } of matchRoutes(routes, window.location) ?? [])
    (route.handle as LoadPage | undefined)?.().catch(() => undefined);

  return routes;
}

function Pages({ routes }: { routes: RouteObject[] }) {
  return useRoutes(routes);
}

export function Router({ routes }: { routes: RouteObject[] }) {
  return (
    <BrowserRouter>
      <RouteErrorBoundary>
        <Suspense fallback={<Loading />}>
          <Pages routes={routes} />
        </Suspense>
      </RouteErrorBoundary>
    </BrowserRouter>
  );
}
