import { useLingui } from "@lingui/react";
import { NavLink, useSearchParams } from "react-router-dom";
import { localDateOf } from "../../shared/format/date";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { hasRole, useUser } from "../features/session/session";
import { paths } from "../paths";

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

/** The sites of whoever reads, and the one whose rows are shown, kept in the address. */
export function useSiteChoice() {
  const user = useUser();
  const [search, setSearch] = useSearchParams();
  const chosen = user.sites.find(({ id }) => id === search.get("site")) ?? null;
  return {
    sites: user.sites,
    site: chosen,
    /** Whether this person may add to the register at all; each row says what may be done with it. */
    isOfficer: hasRole(user, "officer"),
    siteName: (id: string) => user.sites.find((site) => site.id === id)?.name ?? "",
    todayAt: (id: string) =>
      localDateOf(
        new Date().toISOString(),
        user.sites.find((site) => site.id === id)?.timeZone ?? "UTC",
      ),
    choose: (id: string | null) =>
      setSearch((before) => {
        const next = new URLSearchParams(before);
        if (id === null) next.delete("site");
        else next.set("site", id);
        return next;
      }),
  };
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
