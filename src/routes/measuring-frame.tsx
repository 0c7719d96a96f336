import { useLingui } from "@lingui/react";
import { NavLink } from "react-router-dom";
import { hasRole, useUser } from "../features/session/session";
import { paths } from "../paths";

/** From one page of measuring to the others; a supervisor has runs and instruments only. */
export function MeasuringWays() {
  const { i18n } = useLingui();
  const isOffice = hasRole(useUser(), "officer", "auditor");
  const items = [
    { to: paths.toMeasure, label: i18n.t("To be measured"), isOffice: true },
    { to: paths.surveys, label: i18n.t("Surveys"), isOffice: true },
    { to: paths.outAndBack, label: i18n.t("Out and back"), isOffice: true },
    { to: paths.runs, label: i18n.t("Runs"), isOffice: false },
    { to: paths.historyImports, label: i18n.t("Time histories"), isOffice: true },
    { to: paths.recordings, label: i18n.t("Recordings"), isOffice: true },
    { to: paths.instruments, label: i18n.t("Instruments"), isOffice: false },
  ].filter((item) => isOffice || !item.isOffice);
  return (
    <span className="ways">
      {items.map(({ to, label }) => (
        <NavLink key={to} className="link" to={to} end={to === paths.toMeasure}>
          {label}
        </NavLink>
      ))}
    </span>
  );
}
