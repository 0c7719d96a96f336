import { formatChance, formatShare } from "../../shared/format/dose";
import { useLocale } from "../lib/i18n";

export interface Share {
  readonly label: string;
  readonly sharePct: number;
}

/** Where the decibels (or the uncertainty) come from. The bar is drawn for the eye, the sentence beneath says it all. */
export function ShareBar({
  shares,
  kind = "level",
  lead,
}: {
  shares: readonly Share[];
  kind?: "level" | "uncertainty";
  /** "Share of u²", before the list in words. */
  lead?: string;
}) {
  const locale = useLocale();
  const words = shares
    .map((share) => `${share.label} ${formatChance(share.sharePct, locale)}`)
    .join(", ");
  return (
    <div>
      <div
        className={`share-bar${kind === "uncertainty" ? " is-uncertainty" : ""}`}
        aria-hidden="true"
      >
        {shares.map((share) => (
          <span key={share.label} style={{ flex: `${share.sharePct} 1 0` }}>
            {kind === "level" && share.sharePct >= 12 && (
              <>
                <span>{share.label}</span>
                <span className="mono">{formatShare(share.sharePct, locale)}</span>
              </>
            )}
          </span>
        ))}
      </div>
      <p className="share-words">{lead ? `${lead}: ${words}.` : `${words}.`}</p>
    </div>
  );
}
