import type { I18n } from "@lingui/core";
import type { QueryClient } from "@tanstack/react-query";
import { Suspense } from "react";
import {
  BrowserRouter,
  matchRoutes,
  Navigate,
  type RouteObject,
  useLocation,
  useRoutes,
} from "react-router-dom";
import { keepLanguage, sessionQuery, useUser } from "./features/session/session";
import { readAs } from "./lib/i18n";
import { paths } from "./paths";
import { dayRoutes } from "./routes/day-routes";
import { homeOf } from "./routes/home";
import { Loading } from "./routes/loading";
import { officerRoutes, waitingRoutes } from "./routes/officer-routes";
import { LazyPage, type LoadPage, once, pageRoute, withWords } from "./routes/page-loading";
import { peopleRoutes } from "./routes/people-routes";
import { RouteErrorBoundary } from "./routes/route-error";
import { SignedIn } from "./routes/signed-in";

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

  const routes: RouteObject[] = [
    pageRoute(paths.signIn, () => import("./routes/sign-in")),
    pageRoute(paths.signedOut, () => import("./routes/signed-out")),
    pageRoute(paths.noAccess, () => import("./routes/no-access")),
    pageRoute(paths.acknowledge(":secret"), () => import("./routes/acknowledge-page")),
    {
      element: <LazyPage load={loadSignedIn} />,
      handle: loadSignedIn,
      children: [
        { index: true, element: <Home /> },
        {
          element: <RouteErrorBoundary />,
          children: [
            pageRoute(paths.me, () => import("./routes/me-page")),
            withWords(i18n, ["office", "rules"], waitingRoutes, ["officer"]),
            withWords(i18n, ["office", "rules"], officerRoutes, [
              "officer",
              "auditor",
              "supervisor",
              "visitor",
            ]),
            withWords(i18n, ["day", "rules"], dayRoutes, ["officer"]),
            withWords(i18n, ["people", "rules"], peopleRoutes, []),
            pageRoute("*", () => import("./routes/desk-pages")),
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
