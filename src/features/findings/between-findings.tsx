import { useLingui } from "@lingui/react";
import { useEffect } from "react";
import { useNavigate } from "react-router-dom";
import { TextLink } from "../../components/link";
import { useFindingNeighbours } from "../../lib/finding-order";
import { paths } from "../../paths";

const isTyping = (target: EventTarget | null): boolean =>
  target instanceof Element &&
  target.closest("input, textarea, select, [contenteditable], dialog") !== null;

/** Goes through the list that one came from, by link or by the keys j and k. */
export function BetweenFindings({ id }: { id: string }) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const neighbours = useFindingNeighbours(id);
  const before = neighbours?.before ?? null;
  const after = neighbours?.after ?? null;
  useEffect(() => {
    const go = (event: KeyboardEvent) => {
      if (event.altKey || event.ctrlKey || event.metaKey || event.isComposing) return;
      if (isTyping(event.target)) return;
      const to = event.key === "j" ? after : event.key === "k" ? before : null;
      if (to !== null) void navigate(paths.finding(to));
    };
    document.addEventListener("keydown", go);
    return () => document.removeEventListener("keydown", go);
  }, [before, after, navigate]);
  if (!neighbours) return null;
  return (
    <nav className="between-findings no-print" aria-label={i18n.t("Through the findings")}>
      {i18n.t("{place} of {count} in the list.", {
        place: neighbours.place,
        count: neighbours.count,
      })}{" "}
      {after !== null && (
        <>
          <TextLink to={paths.finding(after)} aria-keyshortcuts="j">
            {i18n.t("Next")}
          </TextLink>{" "}
          <kbd>j</kbd>{" "}
        </>
      )}
      {before !== null && (
        <>
          <TextLink to={paths.finding(before)} aria-keyshortcuts="k">
            {i18n.t("Previous")}
          </TextLink>{" "}
          <kbd>k</kbd>
        </>
      )}
    </nav>
  );
}
