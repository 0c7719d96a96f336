import type { ReactNode } from "react";
import { formatLevel, formatUncertainty } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";

/** A level with its uncertainty, the verdict beneath: the cells on either side of a strip. */
export function LevelFigure({
  levelDb,
  uncertaintyDb = null,
  bound = "exact",
  isStrong = false,
  children,
}: {
  levelDb: number | null;
  uncertaintyDb?: number | null;
  bound?: "exact" | "upper" | "lower";
  isStrong?: boolean;
  children?: ReactNode;
}) {
  const locale = useLocale();
  return (
    <span className="level-figure">
      <span className="level-figure-line">
        <span className={isStrong ? "figure is-strong" : "figure"}>
          {formatLevel(levelDb, locale, bound)}
        </span>
        {levelDb !== null && uncertaintyDb !== null && (
          <span className="figure-u">{formatUncertainty(uncertaintyDb, locale)}</span>
        )}
      </span>
      {children}
    </span>
  );
}
