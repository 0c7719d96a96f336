import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { lazy, Suspense, useLayoutEffect, useState } from "react";
import { NavigationType, Outlet, useLocation, useNavigationType } from "react-router-dom";
import { isolate } from "../../shared/i18n/isolate";
import type { SessionRole, SessionUser } from "../../shared/schemas/session";
import { ConnectionBanner } from "../components/connection-banner";
import { HeadPlace } from "../components/in-head";
import { type NavItem, Page, RunningHead } from "../components/page";
import { AccountActions, OwnLanguage } from "../features/session/account-actions";
import { hasRole, useUser } from "../features/session/session";
import { TypedBy } from "../lib/keep-typed";
import { useIsPhone } from "../lib/use-is-phone";
import { paths } from "../paths";

/** The pages of each role, those of several roles one after the other. */
function useNavigation(user: SessionUser): NavItem[] {
  const { i18n } = useLingui();
  const officer = hasRole(user, "officer");
  const auditor = hasRole(user, "auditor");
  /** Reads records, if only of a year. */
  const reader = auditor || hasRole(user, "visitor");
  const items: (NavItem | false)[] = [
    officer && { to: paths.waiting, label: i18n.t("Waiting for you") },
    officer && { to: paths.days, label: i18n.t("Days") },
    hasRole(user, "supervisor") && { to: paths.crewSheet, label: i18n.t("Crew sheet") },
    reader && { to: paths.yearFile, label: i18n.t("Year file") },
    (officer || reader) && { to: paths.workers, label: i18n.t("Workers") },
    (officer || reader) && { to: paths.findings, label: i18n.t("Findings") },
    (officer || auditor) && { to: paths.toMeasure, label: i18n.t("Measuring") },
    (officer || auditor) && { to: paths.protectors, label: i18n.t("Protectors") },
    reader && { to: paths.trail, label: i18n.t("Trail") },
    (officer || auditor) && { to: paths.plans, label: i18n.t("Plans") },
    (officer || auditor) && { to: paths.rules, label: i18n.t("Rules") },
    hasRole(user, "administrator") && { to: paths.people, label: i18n.t("People") },
    hasRole(user, "administrator") && { to: paths.sites, label: i18n.t("Sites") },
    hasRole(user, "administrator") && !reader && { to: paths.trail, label: i18n.t("Trail") },
    hasRole(user, "representative") && { to: paths.siteFigures, label: i18n.t("The site") },
    hasRole(user, "employer") && { to: paths.sharedResults, label: i18n.t("Results shared") },
    hasRole(user, "worker") && user.roles.length > 1 && { to: paths.me, label: i18n.t("My page") },
  ];
  return items.filter((item) => item !== false);
}

/** What somebody is here, in a word: the role with most to do. */
function roleWord(i18n: I18n, roles: readonly SessionRole[]): string {
  if (roles.includes("officer")) return i18n.t("safety officer");
  if (roles.includes("supervisor")) return i18n.t("supervisor");
  if (roles.includes("auditor")) return i18n.t("auditor");
  if (roles.includes("administrator")) return i18n.t("administrator");
  if (roles.includes("visitor")) return i18n.t("visitor");
  if (roles.includes("representative")) return i18n.t("workers’ representative");
  if (roles.includes("employer")) return i18n.t("reader for an employer");
  return i18n.t("worker");
}

/** Where somebody is here: a visitor in one year of a site. */
function placeText(i18n: I18n, { roles, sites, visits, organizationName }: SessionUser): string {
  const [site] = sites;
  const [visit] = visits;
  if (!site || sites.length > 1) return organizationName;
  return visit && visits.length === 1 && roles.every((role) => role === "visitor")
    ? i18n.t("{site}, {year} only", { site: site.name, year: String(visit.year) })
    : site.name;
}

/** For those who have them: a worker's page is without. */
const SearchBox = lazy(() =>
  import("../features/session/search-box").then(({ SearchBox }) => ({ default: SearchBox })),
);
const AccountMenu = lazy(() =>
  import("../features/session/account-menu").then(({ AccountMenu }) => ({ default: AccountMenu })),
);
/** For whoever has a crew and may be without a connection. */
const Unsent = lazy(() =>
  import("../features/session/unsent").then(({ Unsent }) => ({ default: Unsent })),
);

/** Keeps the place of the search until it is there. */
function SearchBoxFrame() {
  return (
    <div className="search-box" aria-hidden="true">
      <input type="search" tabIndex={-1} readOnly />
    </div>
  );
}

/** A page that is gone on to starts at its head; going back, the browser finds the place again. */
function useStartAtHead(): void {
  const { pathname, hash } = useLocation();
  const isBack = useNavigationType() === NavigationType.Pop;
  // biome-ignore lint/correctness/useExhaustiveDependencies: what is searched or opened on a page moves nothing
  useLayoutEffect(() => {
    if (!isBack && hash === "" && window.scrollY > 0) window.scrollTo(0, 0);
  }, [pathname]);
}

/** Frame of every page behind the sign-in. A worker's page and the Crew sheet bring words of their own. */
export function SignedIn() {
  const { i18n } = useLingui();
  const user = useUser();
  useStartAtHead();
  const items = useNavigation(user);
  const isPlain = items.length <= 1;
  // On the Crew sheet one line says whose it is and the time.
  const isSheet = isPlain && hasRole(user, "supervisor");
  const [place, setPlace] = useState<HTMLElement | null>(null);
  const isPhone = useIsPhone();
  // A phone has room in the head for the languages at the most: the way out stands at the foot of the page.
  const isAccountAtFoot = isPlain && isPhone;
  const whoAndWhat = `${isolate(user.name)}, ${roleWord(i18n, user.roles)}`;
  return (
    <Page
      head={
        <>
          <ConnectionBanner />
          <RunningHead
            items={isPlain ? [] : items}
            title={hasRole(user, "worker") && isPlain ? user.name : "Dinward"}
            place={isSheet ? setPlace : undefined}
            account={
              isAccountAtFoot ? (
                isSheet ? undefined : (
                  <OwnLanguage />
                )
              ) : (
                <>
                  {hasRole(user, "officer", "auditor") && (
                    <Suspense fallback={<SearchBoxFrame />}>
                      <SearchBox />
                    </Suspense>
                  )}
                  {!isPlain && <span className="account-site">{placeText(i18n, user)}</span>}
                  {isPlain && !hasRole(user, "worker") && <b>{user.name}</b>}
                  {isPlain ? (
                    <>
                      <OwnLanguage />
                      <AccountActions />
                    </>
                  ) : (
                    <Suspense fallback={<b>{whoAndWhat}</b>}>
                      <AccountMenu>{whoAndWhat}</AccountMenu>
                    </Suspense>
                  )}
                </>
              )
            }
          />
        </>
      }
    >
      <TypedBy value={user.id}>
        <HeadPlace value={isSheet ? place : undefined}>
          <Outlet />
        </HeadPlace>
      </TypedBy>
      {hasRole(user, "supervisor", "officer") && (
        <Suspense fallback={null}>
          <Unsent />
        </Suspense>
      )}
      {isAccountAtFoot && (
        <div className="foot-account">
          <b>{user.name}</b>
          {isSheet && <OwnLanguage />}
          <AccountActions />
        </div>
      )}
    </Page>
  );
}
