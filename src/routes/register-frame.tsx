import { useLingui } from "@lingui/react";
import { NavLink } from "react-router-dom";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { paths } from "../paths";
import type { useSiteChoice } from "./site-choice";

/** From one page of the programme's description to the others. */
export function RuleWays() {
  const { i18n } = useLingui();
  const items = [
    { to: paths.rules, label: i18n.t("Sites and rule sets") },
    { to: paths.areas, label: i18n.t("Areas") },
    { to: paths.tasks, label: i18n.t("Tasks") },
    { to: paths.jobs, label: i18n.t("Jobs") },
    { to: paths.crews, label: i18n.t("Crews") },
  ];
  return (
    <span className="ways">
      {items.map(({ to, label }) => (
        <NavLink key={to} className="link" to={to} end={to === paths.rules}>
          {label}
        </NavLink>
      ))}
    </span>
  );
}

/** Narrows a list to one site; nothing where there is only one. */
export function SiteChoice({ choice }: { choice: ReturnType<typeof useSiteChoice> }) {
  const { i18n } = useLingui();
  if (choice.sites.length < 2) return null;
  return (
    <FilterRow label={i18n.t("What is shown")}>
      <FilterSelect
        label={i18n.t("Site")}
        value={choice.site?.id ?? ""}
        choices={[
          { value: "", label: i18n.t("All sites") },
          ...choice.sites.map(({ id, name }) => ({ value: id, label: name })),
        ]}
        onChange={(id) => choice.choose(id === "" ? null : id)}
      />
    </FilterRow>
  );
}
