import { useLingui } from "@lingui/react";
import { type ReactNode, useEffect, useRef, useState } from "react";
import { chooseTheme, readTheme, type Theme } from "../../lib/theme";
import { AccountActions, OwnLanguage } from "./account-actions";

/** A menu that closes as soon as somebody goes on elsewhere, or presses Escape in it. */
function useCloseElsewhere() {
  const menu = useRef<HTMLDetailsElement>(null);
  useEffect(() => {
    const leave = ({ target }: Event) => {
      if (menu.current?.open && !(target instanceof Node && menu.current.contains(target)))
        menu.current.open = false;
    };
    const closeOnEscape = ({ key }: KeyboardEvent) => {
      const opened = menu.current;
      if (key !== "Escape" || !opened?.open || !opened.contains(document.activeElement)) return;
      opened.open = false;
      opened.querySelector("summary")?.focus();
    };
    document.addEventListener("pointerdown", leave);
    document.addEventListener("focusin", leave);
    document.addEventListener("keydown", closeOnEscape);
    return () => {
      document.removeEventListener("pointerdown", leave);
      document.removeEventListener("focusin", leave);
      document.removeEventListener("keydown", closeOnEscape);
    };
  }, []);
  return menu;
}

/** Who is signed in; opened, the language, light or dark, and the way out. */
export function AccountMenu({ children }: { children: ReactNode }) {
  const { i18n } = useLingui();
  const [theme, setTheme] = useState<Theme>(readTheme);
  const themes: [Theme, string][] = [
    ["system", i18n.t("As the device")],
    ["light", i18n.t("Light")],
    ["dark", i18n.t("Dark")],
  ];
  const menu = useCloseElsewhere();
  return (
    <details className="account-menu" ref={menu}>
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
        <OwnLanguage />
        <AccountActions />
      </div>
    </details>
  );
}
