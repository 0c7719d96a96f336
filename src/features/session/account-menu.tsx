import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import { chooseTheme, readTheme, type Theme } from "../../lib/theme";
import { AccountActions } from "./account-actions";

/** Who is signed in; opened, the language, light or dark, and the way out. */
export function AccountMenu({ children }: { children: ReactNode }) {
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
        <b>{children}</b>
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
