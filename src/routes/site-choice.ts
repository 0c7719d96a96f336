import { useSearchParams } from "react-router-dom";
import { localDateOf } from "../../shared/format/date";
import { hasRole, useUser } from "../features/session/session";

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
