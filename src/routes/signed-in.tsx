import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useState } from "react";
import { Outlet, useLocation } from "react-router-dom";
import type { RoleName, SessionUser } from "../../shared/schemas/session";
import { ConnectionBanner } from "../components/connection-banner";
import { LangSwitch } from "../components/lang-switch";
import { TextButton } from "../components/link";
import { type NavItem, Page, RunningHead } from "../components/page";
import { SearchBox } from "../features/session/search-box";
import { hasRole, keepLanguage, signOut, useUser } from "../features/session/session";
import { chooseTheme, readTheme, type Theme } from "../lib/theme";
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

/** What somebody is here, in a word: the role with most to do. */
function roleWord(i18n: I18n, roles: readonly RoleName[]): string {
  if (roles.includes("officer")) return i18n.t("safety officer");
  if (roles.includes("supervisor")) return i18n.t("supervisor");
  if (roles.includes("auditor")) return i18n.t("auditor");
  if (roles.includes("administrator")) return i18n.t("administrator");
  return i18n.t("worker");
}

function AccountActions() {
  const { i18n } = useLingui();
  return (
    <>
      <LangSwitch onChosen={(locale) => void keepLanguage(locale)} />
      <TextButton onClick={() => void signOut()}>{i18n.t("Sign out")}</TextButton>
    </>
  );
}

/** Who is signed in; opened, the language, light or dark, and the way out. */
function AccountMenu({ name, role }: { name: string; role: string }) {
  const { i18n } = useLingui();
  const [theme, setTheme] = useState<Theme>(readTheme);
  const themes: [Theme, string][] = [
    ["system", i18n.t("As the device")],
    ["light", i18n.t("Light")],
    ["dark", i18n.t("Dark")],
  ];
  return (
    <details className="account-menu">
      <summary>
        <b>
          {name}, {role}
        </b>
      </summary>
      <div className="account-menu-leaf">
        <fieldset>
          <legend>{i18n.t("Light or dark")}</legend>
          {themes.map(([value, label]) => (
            <label key={value}>
              <input
                type="radio"
                name="theme"
                checked={theme === value}
                onChange={() => {
                  chooseTheme(value);
                  setTheme(value);
                }}
              />
              {label}
            </label>
          ))}
        </fieldset>
        <AccountActions />
      </div>
    </details>
  );
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
                {isPlain && !hasRole(user, "worker") && <b>{user.name}</b>}
                {isPlain ? (
                  <AccountActions />
                ) : (
                  <AccountMenu name={user.name} role={roleWord(i18n, user.roles)} />
                )}
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
