import { useLingui } from "@lingui/react";
import { Outlet, useLocation } from "react-router-dom";
import type { SessionUser } from "../../shared/schemas/session";
import { ConnectionBanner } from "../components/connection-banner";
import { LangSwitch } from "../components/lang-switch";
import { TextButton } from "../components/link";
import { type NavItem, Page, RunningHead } from "../components/page";
import { SearchBox } from "../features/session/search-box";
import { hasRole, signOut, useUser } from "../features/session/session";
import { paths } from "../paths";

/** The pages of each role, those of several roles one after the other. */
function useNavigation(user: SessionUser): NavItem[] {
  const { i18n } = useLingui();
  const officer = hasRole(user, "officer");
  const auditor = hasRole(user, "auditor");
  const items: (NavItem | false)[] = [
    officer && { to: paths.waiting, label: i18n.t("Waiting for you") },
    officer && { to: paths.days, label: i18n.t("Days") },
    hasRole(user, "supervisor") && { to: paths.crewSheet, label: i18n.t("Crew sheet") },
    auditor && { to: paths.yearFile, label: i18n.t("Year file") },
    (officer || auditor) && { to: paths.workers, label: i18n.t("Workers") },
    (officer || auditor) && { to: paths.findings, label: i18n.t("Findings") },
    (officer || auditor) && { to: paths.runs, label: i18n.t("Runs") },
    (officer || auditor) && { to: paths.protectors, label: i18n.t("Protectors") },
    auditor && { to: paths.trail, label: i18n.t("Trail") },
    (officer || auditor) && { to: paths.rules, label: i18n.t("Rules") },
    hasRole(user, "administrator") && { to: paths.people, label: i18n.t("People") },
    hasRole(user, "administrator") && { to: paths.sites, label: i18n.t("Sites") },
    hasRole(user, "worker") && user.roles.length > 1 && { to: paths.me, label: i18n.t("My page") },
  ];
  return items.filter((item) => item !== false);
}

/** Frame of every page behind the sign-in. A worker's page and the Crew sheet bring words of their own. */
export function SignedIn() {
  const { i18n } = useLingui();
  const user = useUser();
  const items = useNavigation(user);
  const { pathname, search } = useLocation();
  const isPlain = items.length <= 1;
  return (
    <Page
      head={
        <>
          <ConnectionBanner
            signInTo={`${paths.signIn}?returnTo=${encodeURIComponent(pathname + search)}`}
          />
          <RunningHead
            items={isPlain ? [] : items}
            title={hasRole(user, "worker") && isPlain ? user.name : "Dinward"}
            account={
              <>
                {hasRole(user, "officer", "auditor") && <SearchBox />}
                {!isPlain && (
                  <span className="account-site">
                    {user.sites.length === 1 ? user.sites[0]?.name : user.organizationName}
                  </span>
                )}
                {!(hasRole(user, "worker") && isPlain) && <b>{user.name}</b>}
                <LangSwitch />
                <TextButton onClick={() => void signOut()}>{i18n.t("Sign out")}</TextButton>
              </>
            }
          />
        </>
      }
    >
      <Outlet />
    </Page>
  );
}
