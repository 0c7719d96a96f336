import type { I18n } from "@lingui/core";
import type { QueryClient } from "@tanstack/react-query";
import { createBrowserRouter, type RouteObject, redirect } from "react-router-dom";
import { addCatalogue, type CataloguePart, isLocale } from "../shared/i18n";
import { sessionQuery } from "./features/session/session";
import { paths } from "./paths";
import { dayRoutes } from "./routes/day-routes";
import { homeOf } from "./routes/home";
import { Loading } from "./routes/loading";
import { officerRoutes, waitingRoutes } from "./routes/officer-routes";
import { peopleRoutes } from "./routes/people-routes";
import { registerRoutes } from "./routes/register-routes";
import { RouteError } from "./routes/route-error";
import { SignedIn } from "./routes/signed-in";

export function createRouter(queryClient: QueryClient, i18n: I18n) {
  /** Nobody signed in: to the sign-in page, and back here afterwards. */
  const requireUser = async ({ request }: { request: Request }) => {
    const { user, pendingName } = await queryClient.ensureQueryData(sessionQuery);
    const url = new URL(request.url);
    if (!user)
      throw redirect(
        pendingName
          ? paths.noAccess
          : `${paths.signIn}?returnTo=${encodeURIComponent(url.pathname + url.search)}`,
      );
    if (
      !document.cookie.includes("dinward.locale=") &&
      isLocale(user.language) &&
      user.language !== i18n.locale
    ) {
      const { chooseLocale } = await import("./lib/i18n");
      await chooseLocale(i18n, user.language);
    }
    return null;
  };

  /** Pages that need further parts of the catalogue than everybody's. */
  const withWords = (parts: readonly CataloguePart[], children: RouteObject[]): RouteObject => ({
    loader: async () => {
      await Promise.all(parts.map((part) => addCatalogue(i18n, part)));
      return null;
    },
    shouldRevalidate: () => false,
    children,
  });

  return createBrowserRouter([
    {
      errorElement: <RouteError />,
      hydrateFallbackElement: <Loading />,
      children: [
        { path: paths.signIn, lazy: () => import("./routes/sign-in") },
        { path: paths.signedOut, lazy: () => import("./routes/signed-out") },
        { path: paths.noAccess, lazy: () => import("./routes/no-access") },
        {
          element: <SignedIn />,
          loader: requireUser,
          shouldRevalidate: () => false,
          children: [
            {
              index: true,
              loader: async () => {
                const { user } = await queryClient.ensureQueryData(sessionQuery);
                return user ? redirect(homeOf(user)) : redirect(paths.signIn);
              },
            },
            {
              errorElement: <RouteError />,
              children: [
                { path: paths.me, lazy: () => import("./routes/me-page") },
                withWords(["office"], waitingRoutes),
                withWords(["office", "rules"], officerRoutes),
                withWords(["day", "rules"], dayRoutes),
                withWords(["register", "office", "rules"], registerRoutes),
                withWords(["people"], peopleRoutes),
                { path: "*", lazy: () => import("./routes/not-found") },
              ],
            },
          ],
        },
      ],
    },
  ]);
}
