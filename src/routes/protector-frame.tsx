import { useLingui } from "@lingui/react";
import { NavLink } from "react-router-dom";
import { hasRole, useUser } from "../features/session/session";
import { paths } from "../paths";

/** From one page about protectors to the others. */
export function ProtectorWays() {
  const { i18n } = useLingui();
  const user = useUser();
  const items = [
    { to: paths.protectors, label: i18n.t("Register"), isFor: true },
    { to: paths.fitting, label: i18n.t("Fit and issue"), isFor: hasRole(user, "officer") },
    { to: paths.choose, label: i18n.t("Choose"), isFor: hasRole(user, "officer", "auditor") },
    { to: paths.fits, label: i18n.t("Fit tests"), isFor: hasRole(user, "officer", "auditor") },
    { to: paths.wearing, label: i18n.t("Wearing rounds"), isFor: true },
    {
      to: paths.signals,
      label: i18n.t("Warning signals"),
      isFor: hasRole(user, "officer", "auditor"),
    },
    { to: paths.stock, label: i18n.t("Stock"), isFor: hasRole(user, "officer", "auditor") },
  ].filter(({ isFor }) => isFor);
  return (
    <span className="ways">
      {items.map(({ to, label }) => (
        <NavLink key={to} className="link" to={to} end={to === paths.protectors}>
          {label}
        </NavLink>
      ))}
    </span>
  );
}
